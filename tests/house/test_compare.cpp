// wanewall compare and run --witness, started as a user would.
#include <signal.h>

#include <catch2/catch.hpp>
#include <chrono>
#include <filesystem>
#include <fstream>
#include <iterator>
#include <thread>

#include "io/record.hpp"
#include "tests/house/child_process.hpp"
#include "tests/house/small_scene.hpp"

using namespace wanewall;
using namespace wanewall::test;

namespace {

namespace fs = std::filesystem;

std::string text_of(const std::string& path) {
  std::ifstream in(path);
  return {std::istreambuf_iterator<char>(in), {}};
}

/// 12^3 cells around a current element, in a thin shell.
std::string dipole_scene(int shell_cells, const std::string& courant = "0.99",
                         const std::string& stop = "1 ns") {
  return fmt::format(
      "title: small\n"
      "band: [3 GHz, 20 GHz]\n"
      "clear_volume: {{x: [0 mm, 12 mm], y: [0 mm, 12 mm], z: [0 mm, 12 mm]}}\n"
      "mesh: {{cell: 1 mm, courant: {}}}\n"
      "precision: double\n"
      "illumination:\n"
      "  dipoles: [{{electric: [0 A m, 0 A m, 1 mA m], at: [4 mm, 6 mm, 6.5 mm]}}]\n"
      "  pulse: {{differentiated_gaussian: {{width: 18 ps}}}}\n"
      "shell:\n"
      "  every_face: {{kind: cfs_pml, cells: {}, order: 3, kappa_max: 1, alpha_max: 0 S/m, sigma_max: 8 "
      "S/m}}\n"
      "  faces: {{z-: {{kind: electric_wall, cells: 0}}}}\n"
      "stop: {{at: {}}}\n"
      "record:\n"
      "  points: {{near: [10 mm, 6 mm, 6.5 mm], far: [10 mm, 10 mm, 10.5 mm]}}\n"
      "  shell_audit: {{frequencies: 2}}\n",
      courant, shell_cells, stop);
}

}  // namespace

TEST_CASE("compare tells records apart, draws them and gives a verdict", "[compare]") {
  const ScratchFolder folder;
  for (const int cells : {4, 6, 12})
    REQUIRE(run_program({"run", folder.write(fmt::format("c{}.yaml", cells), dipole_scene(cells)), "--quiet"},
                        folder.path())
                .exit_code == 0);
  const Outcome outcome = run_program(
      {"compare", "c12.h5", "c4.h5", "c6.h5", "--csv", "c.csv", "--picture", "c.svg", "--below", "-10 dB"},
      folder.path());
  CAPTURE(outcome.out, outcome.err);
  CHECK(outcome.exit_code == 0);
  CHECK_THAT(outcome.out, Catch::Contains("## c4.h5") && Catch::Contains("## c6.h5") &&
                              Catch::Contains("| near ") && Catch::Contains("| x- ") &&
                              Catch::Contains("not above -10 dB"));
  CHECK_THAT(text_of(folder.path() + "/c.csv"), Catch::StartsWith("record,point or face,") &&
                                                    Catch::Contains("c6.h5,near,0.01,") &&
                                                    Catch::Contains("c6.h5,x-,"));
  CHECK_THAT(text_of(folder.path() + "/c.svg"), Catch::Contains("</svg>") && Catch::Contains("c4, "));

  const Outcome missed = run_program({"compare", "c12.h5", "c4.h5", "--below", "-150 dB"}, folder.path());
  CHECK(missed.exit_code == 7);
  CHECK_THAT(missed.out, Catch::Contains("ABOVE -150 dB"));

  const Outcome equal = run_program({"compare", "c4.h5", "c4.h5", "--below", "-300 dB"}, folder.path());
  CHECK(equal.exit_code == 0);
  CHECK_THAT(equal.out, Catch::Contains("equal"));

  // Another time step cannot be compared sample by sample.
  REQUIRE(run_program({"run", folder.write("slow.yaml", dipole_scene(4, "0.9")), "--quiet"}, folder.path())
              .exit_code == 0);
  const Outcome other_dt = run_program({"compare", "c4.h5", "slow.h5"}, folder.path());
  CHECK(other_dt.exit_code == 4);
  CHECK_THAT(other_dt.err,
             Catch::Contains("slow.h5") && Catch::Contains("time steps differ") && Catch::Contains("next:"));

  CHECK(run_program({"compare", "c4.h5", "c6.h5", "--below", "low"}, folder.path()).exit_code == 2);
  const Outcome no_point =
      run_program({"compare", "c4.h5", "c6.h5", "--picture", "p.svg", "--point", "nowhere"}, folder.path());
  CHECK(no_point.exit_code == 4);
  CHECK_THAT(no_point.err, Catch::Contains("nowhere"));
}

TEST_CASE("compare refuses records that share nothing", "[compare]") {
  const ScratchFolder folder;
  folder.write("a.yaml", dipole_scene(4));
  folder.write("b.yaml", small_scene(4.0));
  REQUIRE(run_program({"run", "a.yaml", "--quiet"}, folder.path()).exit_code == 0);
  std::string text = dipole_scene(4);
  text.replace(text.find("near: [10"), 9, "near: [11");
  text.replace(text.find("far: [10"), 8, "else: [9");
  text.replace(text.find("{frequencies: 2}"), 16, "off");
  folder.write("c.yaml", text);
  REQUIRE(run_program({"run", "c.yaml", "--quiet"}, folder.path()).exit_code == 0);
  const Outcome outcome = run_program({"compare", "a.h5", "c.h5"}, folder.path());
  CHECK(outcome.exit_code == 4);
  CHECK_THAT(outcome.err, Catch::Contains("shares neither") && Catch::Contains("different places"));
}

TEST_CASE("A witness run says what the shell changed, and both records say what they are", "[witness]") {
  const ScratchFolder folder;
  folder.write("small.yaml", dipole_scene(4));
  const Outcome outcome = run_program({"run", "small.yaml", "--witness"}, folder.path());
  CAPTURE(outcome.out, outcome.err);
  REQUIRE(outcome.exit_code == 0);
  CHECK_THAT(outcome.out, Catch::Contains("## What the shell changed") && Catch::Contains("| near ") &&
                              Catch::Contains("error bar") && Catch::Contains("| z+ ") &&
                              Catch::Contains("witness's own floor"));
  const Record first(folder.path() + "/small.h5"), second(folder.path() + "/small_witness.h5");
  CHECK(first.provenance.witness_of.empty());
  CHECK(second.provenance.witness_of == "small.h5");
  CHECK(second.provenance.witness_faces == "x-, x+, y-, y+, z+");
  CHECK(!second.provenance.witness_layer.empty());
  CHECK(first.result.steps == second.result.steps);
  CHECK(second.lattice.shell(Side::x_lo) > first.lattice.shell(Side::x_lo));
  CHECK(second.lattice.shell(Side::z_lo) == 0);
  CHECK(first.lattice.dt_s == second.lattice.dt_s);
  // The same figures again, from the two files.
  const Outcome again = run_program({"compare", "small_witness.h5", "small.h5"}, folder.path());
  CHECK(again.exit_code == 0);
  const std::string row = again.out.substr(again.out.find("| near "), 60);
  CHECK(!row.empty());
}

TEST_CASE("One face can be exchanged, and only a face that absorbs", "[witness]") {
  const ScratchFolder folder;
  folder.write("small.yaml", dipole_scene(4));
  const Outcome outcome = run_program({"run", "small.yaml", "--witness", "x-,z+", "--quiet"}, folder.path());
  CAPTURE(outcome.out, outcome.err);
  REQUIRE(outcome.exit_code == 0);
  const Record second(folder.path() + "/small_witness_x-_z+.h5");
  CHECK(second.lattice.shell(Side::x_lo) > 4);
  CHECK(second.lattice.shell(Side::x_hi) == 4);
  CHECK(second.provenance.witness_faces == "x-, z+");

  const std::string wrong = GENERATE("z-", "x-,q", "x-,", "all");
  const Outcome refused = run_program({"run", "small.yaml", "--force", "--witness", wrong}, folder.path());
  CAPTURE(wrong, refused.err);
  CHECK(refused.exit_code == 2);
  CHECK_THAT(refused.err, Catch::Contains("x-, x+, y-, y+, z+"));
}

TEST_CASE("The option may stand before the scene, and both targets are checked first", "[witness]") {
  const ScratchFolder folder;
  folder.write("small.yaml", dipole_scene(4));
  folder.write("small_witness.h5", "kept");
  const Outcome taken = run_program({"run", "--witness", "small.yaml"}, folder.path());
  CHECK(taken.exit_code == 4);
  CHECK_THAT(taken.err, Catch::Contains("small_witness.h5"));
  CHECK(!fs::exists(folder.path() + "/small.h5"));
  CHECK(run_program({"run", "--witness"}, folder.path()).exit_code == 2);
}

TEST_CASE("A witness run that is stopped leaves the first record whole", "[witness]") {
  const ScratchFolder folder;
  folder.write("small.yaml", dipole_scene(4, "0.99", "4 ns"));
  Child child({"run", "small.yaml", "--witness"}, folder.path());
  using namespace std::chrono_literals;
  for (int n = 0; n < 6000 && !fs::exists(folder.path() + "/small.h5"); ++n) std::this_thread::sleep_for(5ms);
  child.send(SIGINT);
  const Outcome outcome = child.finish();
  CAPTURE(outcome.out, outcome.err);
  CHECK(outcome.exit_code == 5);
  const Record first(folder.path() + "/small.h5");
  CHECK(first.result.reason == StopReason::reached_end);
  const Record second(folder.path() + "/small_witness.h5");
  CHECK(second.result.reason == StopReason::interrupted);
  CHECK(second.result.steps < first.result.steps);
}
