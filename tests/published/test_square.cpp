// The published two-dimensional test of absorbing layers, shortened: a line of current in 40 x 40 cells,
// probes two cells from a side and a corner, against a lattice so large that nothing returns. Source: A.
// Taflove and S. C. Hagness, Computational Electrodynamics, 3rd ed. (Artech, 2005), ch. 7; from memory: about
// -80 dB with 10 cells of a graded layer, -50 dB with 5.
#include <catch2/catch.hpp>
#include <string>

#include "io/scene.hpp"
#include "io/text_file.hpp"
#include "postproc/compare.hpp"
#include "solver/results.hpp"

using namespace wanewall;

namespace {

struct NoSink : Sink {
  void take(Snapshot) override {}
};
struct GoOn : Monitor {
  bool go_on(const Progress&) override { return true; }
};

/// 250 steps: the direct wave and all that the shell returns of it at once. A signal moves at most one cell
/// per step, so nothing returns from walls 126 cells away.
constexpr long steps = 250;
const std::string large_volume = "{x: [0 mm, 1 mm], y: [-126 mm, 166 mm], z: [-126 mm, 166 mm]}";

void replace(std::string& text, const std::string& old_text, const std::string& new_text) {
  const std::size_t at = text.rfind(old_text);  // the comment names it, too
  REQUIRE(at != std::string::npos);
  text.replace(at, old_text.size(), new_text);
}

struct Run {
  Scene scene;
  RunResult result;
};

Run square(const std::string& shell, const std::string& volume = "") {
  std::string text =
      read_text_file(WANEWALL_SOURCE_DIR "/cases/shell_benchmarks/square.yaml", "reading the scene", 100000);
  replace(text, "{cells: 10}", shell);
  if (!volume.empty()) replace(text, "{x: [0 mm, 1 mm], y: [0 mm, 40 mm], z: [0 mm, 40 mm]}", volume);
  Run run{parse_scene(text, "square.yaml", "."), {}};
  run.scene.problem.stop.at_s = static_cast<double>(steps) * run.scene.problem.lattice.dt_s;
  NoSink sink;
  GoOn monitor;
  run.result = wanewall::run(run.scene.problem, sink, monitor);
  return run;
}

double worst_e_db(const Run& reference, const Run& run) {
  const Comparison c = compare({reference.scene.problem.lattice, reference.result},
                               {run.scene.problem.lattice, run.result}, {});
  REQUIRE(c.points.size() == 2);
  return worst_point(c)->e.peak_db;
}

}  // namespace

TEST_CASE("The two-dimensional test reaches the published figures and its own goals", "[square]") {
  const Run reference = square("{kind: electric_wall}", large_volume);
  const auto db = [&](const std::string& shell) { return worst_e_db(reference, square(shell)); };
  // Designed from the scene alone.
  CHECK(db("{kind: moebius, cells: 5}") < -70.0);
  CHECK(db("{kind: moebius, cells: 8}") < -100.0);
  CHECK(db("{kind: moebius, cells: 10}") < -120.0);
  // The textbook's grading, m = 3 with its rule for sigma, has about the textbook's errors.
  const std::string graded = ", order: 3, kappa_max: 1, alpha_max: 0 S/m}";
  const double ten_db = db("{kind: cfs_pml, cells: 10" + graded),
               five_db = db("{kind: cfs_pml, cells: 5" + graded);
  CHECK(ten_db < -70.0);
  CHECK(ten_db > -95.0);
  CHECK(five_db < -45.0);
  CHECK(five_db > -65.0);
}
