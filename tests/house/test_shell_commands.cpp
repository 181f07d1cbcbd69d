// wanewall shell predict and wanewall shell design, as a user meets them.
#include <catch2/catch.hpp>
#include <cmath>
#include <filesystem>
#include <fstream>
#include <iterator>
#include <sstream>
#include <string>
#include <vector>

#include "io/scene.hpp"
#include "tests/house/child_process.hpp"

using namespace wanewall;
using namespace wanewall::test;

namespace {

const std::string head =
    "band: [1 GHz, 3 GHz]\n"
    "clear_volume: {x: [-50 mm, 50 mm], y: [-50 mm, 50 mm], z: [-50 mm, 50 mm]}\n"
    "mesh: {cell: 5 mm}\n"
    "media: {sand: {permittivity: 3, conductivity: 5 mS/m}}\n"
    "objects: [half_space: {medium: sand, below: {z: -20 mm}}]\n"
    "illumination: {pulse: {fits: band}, dipoles: [{electric: [0 A m, 0 A m, 1 A m], at: [0 m, 0 m, 10 "
    "mm]}]}\n"
    "stop: {at: 4 ns}\n";

std::string scene_with(const std::string& shell) {
  return head + shell;
}

bool has(const std::string& text, const std::string& piece) {
  return text.find(piece) != std::string::npos;
}

std::string contents(const std::string& path) {
  std::ifstream in(path);
  return {std::istreambuf_iterator<char>(in), {}};
}

}  // namespace

TEST_CASE("shell design prints tables that give the same shell when they are pasted") {
  const ScratchFolder folder;
  const std::string path = folder.write("pit.yaml", scene_with("shell: {goal: -30 dB}\n"));
  const Outcome outcome = run_program({"shell", "design", "pit.yaml", "--no-trade"}, folder.path());
  CAPTURE(outcome.err, outcome.out);
  REQUIRE(outcome.exit_code == 0);
  CHECK(has(outcome.out, "dipoles[0]"));
  CHECK(has(outcome.out, "vacuum sand"));
  const std::size_t begin = outcome.out.find("```yaml\n") + 8, end = outcome.out.find("```", begin);
  const std::string pasted = folder.write("pasted.yaml", scene_with(outcome.out.substr(begin, end - begin)));
  const Scene designed = read_scene(path), listed = read_scene(pasted);
  for (Side side : all_sides) {
    const Face &a = designed.problem.face(side), &b = listed.problem.face(side);
    CHECK(a.kind == b.kind);
    CHECK(a.moebius.kappa == b.moebius.kappa);
    CHECK(a.moebius.sigma_s_per_m == b.moebius.sigma_s_per_m);
    CHECK(a.moebius.alpha_s_per_m == b.moebius.alpha_s_per_m);
    CHECK(a.moebius.cells() >= 3);
  }
}

TEST_CASE("shell design weighs cells against the expected error") {
  const ScratchFolder folder;
  folder.write("pit.yaml", scene_with("shell: {every_face: {cells: 3}}\n"));
  const Outcome outcome = run_program({"shell", "design", "pit.yaml"}, folder.path());
  CHECK(outcome.exit_code == 0);
  CHECK(has(outcome.out, "Cells against expected error"));
  CHECK(has(outcome.out, "|    16 |"));
}

TEST_CASE("shell design makes layers for plane waves") {
  const ScratchFolder folder;
  folder.write("pit.yaml", scene_with("shell: {every_face: {cells: 3}}\n"));
  const Outcome outcome =
      run_program({"shell", "design", "pit.yaml", "--plane-waves", "60 deg"}, folder.path());
  CHECK(outcome.exit_code == 0);
  CHECK(has(outcome.out, "moebius, 3 cells: worst -1"));
  CHECK(has(outcome.out, "alpha: [0 S/m, 0 S/m, 0 S/m]"));
  const Outcome wrong =
      run_program({"shell", "design", "pit.yaml", "--plane-waves", "95 deg"}, folder.path());
  CHECK(wrong.exit_code == 2);
  CHECK(has(wrong.err, "from 0 deg to 89 deg"));
}

TEST_CASE("shell predict prints every face that absorbs, with its media, and writes its numbers") {
  const ScratchFolder folder;
  folder.write("pit.yaml",
               scene_with("shell:\n  every_face: {cells: 3}\n  faces:\n    x-: {kind: matched_slab}\n"
                          "    x+: {kind: one_way, order: 2}\n    y-: {kind: electric_wall}\n"
                          "    y+: {kind: cfs_pml, profile: polynomial}\n"));
  const Outcome outcome = run_program({"shell", "predict", "pit.yaml", "--csv", "waves.csv"}, folder.path());
  CAPTURE(outcome.err, outcome.out);
  REQUIRE(outcome.exit_code == 0);
  for (const char* piece :
       {"x-: matched_slab, 3 cells, in vacuum, te", "x-: matched_slab, 3 cells, in sand, tm",
        "x+: one_way, order 2, in vacuum", "y-: electric_wall, R = -1", "y+: cfs_pml, 3 cells, in sand",
        "z-: moebius, 3 cells, in sand", "| 89 deg", "decay 0.2", "ms per thousand"})
    CHECK(has(outcome.out, piece));
  const std::string csv = contents(folder.path() + "/waves.csv");
  CHECK(has(csv, "face,kind,medium,polarisation"));
  CHECK(has(csv, "z+,moebius,vacuum,both,1e+09,89,"));
}

TEST_CASE("shell predict draws a picture, or says what it needs for it") {
  const ScratchFolder folder;
  folder.write("pit.yaml", scene_with("shell: {every_face: {cells: 3}}\n"));
  const Outcome outcome =
      run_program({"shell", "predict", "pit.yaml", "--picture", "waves.svg"}, folder.path());
  CAPTURE(outcome.err);
  if (std::system("command -v gnuplot > /dev/null 2>&1") == 0) {
    CHECK(outcome.exit_code == 0);
    CHECK(has(contents(folder.path() + "/waves.svg"), "<svg"));
    const Outcome nowhere =
        run_program({"shell", "predict", "pit.yaml", "--picture", "no/such/waves.svg"}, folder.path());
    CHECK(nowhere.exit_code == 4);
  } else {
    CHECK(outcome.exit_code == 4);
    CHECK(has(outcome.err, "gnuplot-nox"));
  }
}

TEST_CASE("shell measure reads from the march what the lattice theory says") {
  const ScratchFolder folder;
  folder.write("two.yaml", scene_with("shell: {every_face: {kind: cfs_pml, cells: 5, profile: polynomial}, "
                                      "faces: {z+: {kind: moebius, cells: 4}}}\n"));
  const Outcome outcome = run_program({"shell", "measure", "two.yaml", "--angles", "45"}, folder.path());
  CAPTURE(outcome.err, outcome.out);
  REQUIRE(outcome.exit_code == 0);
  int rows = 0;
  std::istringstream lines(outcome.out);
  for (std::string line; std::getline(lines, line);) {
    if (!has(line, "| TE") && !has(line, "| TM")) continue;
    ++rows;
    std::vector<std::string> cells;
    std::istringstream columns(line);
    for (std::string cell; std::getline(columns, cell, '|');) cells.push_back(cell);
    REQUIRE(cells.size() >= 10);
    CAPTURE(line);
    CHECK(std::stod(cells[8]) < -15.0);
    CHECK(std::abs(std::stod(cells[9])) < 0.05);
  }
  CHECK(rows == 4);  // five faces are alike, and two polarisations
}

TEST_CASE("a goal is designed for before a run and shown as held after it, with its floor") {
  const ScratchFolder folder;
  const std::string scene = std::string(WANEWALL_SOURCE_DIR) + "/cases/audited_box.yaml";
  REQUIRE(run_program({"run", scene, "--record", "box.h5"}, folder.path()).exit_code == 0);
  const Outcome outcome = run_program({"tables", "box.h5"}, folder.path());
  CAPTURE(outcome.err);
  REQUIRE(outcome.exit_code == 0);
  int held = 0;
  const std::string words = "holds the goal of -80 dB; as designed to -1";
  for (std::size_t at = outcome.out.find(words); at != std::string::npos;
       at = outcome.out.find(words, at + 1))
    ++held;
  CHECK(held == 6);
}
