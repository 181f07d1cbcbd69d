// wanewall check as a user meets it.
#include <yaml-cpp/yaml.h>

#include <catch2/catch.hpp>
#include <string>

#include "tests/house/child_process.hpp"
#include "tests/house/small_scene.hpp"

using namespace wanewall::test;

namespace {

bool has(const std::string& text, const std::string& part) {
  return text.find(part) != std::string::npos;
}

}  // namespace

TEST_CASE("check prints what will be built and ends with code 0") {
  const ScratchFolder folder;
  folder.write("small.yaml", small_scene(5.0));
  const Outcome outcome = run_program({"check", "small.yaml"}, folder.path());
  CHECK(outcome.exit_code == 0);
  CHECK(outcome.err.empty());
  for (const std::string part :
       {"Lattice", "20 x 20 x 20 cells", "26 x 26 x 26 cells", "Memory", "shell audit", "Media",
        "Illumination", "Shell", "cfs_pml", "Record", "Warnings"})
    CHECK(has(outcome.out, part));
  CHECK_FALSE(has(outcome.out, "Values used"));
  const Outcome values = run_program({"check", "--values", "small.yaml"}, folder.path());
  CHECK(values.exit_code == 0);
  CHECK(has(values.out, "Values used"));
  CHECK(has(values.out, "mesh.courant"));
}

TEST_CASE("check prints the schema and the reference page without a scene") {
  const ScratchFolder folder;
  const Outcome schema = run_program({"check", "--schema"}, folder.path());
  CHECK(schema.exit_code == 0);
  CHECK(YAML::Load(schema.out)["required"].size() == 4);
  const Outcome reference = run_program({"check", "--reference"}, folder.path());
  CHECK(reference.exit_code == 0);
  CHECK(has(reference.out, "## plane_wave"));
  folder.write("small.yaml", small_scene(5.0));
  CHECK(run_program({"check", "--schema", "small.yaml"}, folder.path()).exit_code == 2);
  CHECK(run_program({"check", "--schema", "--reference"}, folder.path()).exit_code == 2);
}

TEST_CASE("check of a scene that is not there ends with code 4 and names it") {
  const ScratchFolder folder;
  const Outcome outcome = run_program({"check", "none.yaml"}, folder.path());
  CHECK(outcome.exit_code == 4);
  CHECK(has(outcome.err, "none.yaml: reading the scene: No such file"));
}
