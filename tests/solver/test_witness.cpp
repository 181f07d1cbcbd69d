// The same problem behind a thicker shell: nothing inside moves, and what the shell did shows.
#include <catch2/catch.hpp>
#include <cmath>

#include "postproc/compare.hpp"
#include "solver/results.hpp"
#include "solver/shell/layer_table.hpp"
#include "solver/shell/witness.hpp"

using namespace wanewall;

namespace {

constexpr double cell_m = 1e-3;

struct NoSink : Sink {
  void take(Snapshot) override {}
};
struct GoOn : Monitor {
  bool go_on(const Progress&) override { return true; }
};

Face poor_face(int cells) {
  Face face;
  face.kind = FaceKind::cfs_pml;
  PolynomialGrading grading;
  grading.sigma_max_s_per_m = sigma_max_rule(grading.order, cell_m, 1.0);
  face.layer = polynomial_layer(grading, cells);
  return face;
}

/// 8^3 clear cells from the origin on with a current element; `shell` cells and faces all around.
Problem box(int shell, const Face& face, long steps) {
  Problem problem;
  problem.precision = Precision::double_precision;
  for (auto& lines : problem.lattice.lines)
    lines = MeshLines::uniform(-shell * cell_m, cell_m, 8 + 2 * shell);
  problem.lattice.shell_cells.fill(face.cells());
  problem.lattice.dt_s = 0.99 * problem.lattice.courant_limit_s();
  problem.media = {Medium{}};
  problem.faces.fill(face);
  Dipole dipole;
  dipole.position_m = {3e-3, 4e-3, 3.5e-3};
  dipole.moment = {0.0, 0.0, 1e-3};
  dipole.pulse.kind = Pulse::Kind::differentiated_gaussian;
  dipole.pulse.width_s = 6.0 * problem.lattice.dt_s;
  dipole.pulse.delay_s = 42.0 * problem.lattice.dt_s;
  problem.dipoles = {dipole};
  problem.recording.points = {{"corner", {6e-3, 6e-3, 5.5e-3}}, {"face", {2e-3, 4e-3, 3.5e-3}}};
  problem.stop.at_s = static_cast<double>(steps) * problem.lattice.dt_s;
  problem.threads = 2;
  return problem;
}

RunResult result_of(const Problem& problem) {
  NoSink sink;
  GoOn monitor;
  return run(problem, sink, monitor);
}

double difference_db(const Problem& reference, const RunResult& truth, const Problem& problem,
                     const RunResult& result) {
  return worst_peak_db(compare({reference.lattice, truth}, {problem.lattice, result}, {}));
}

}  // namespace

TEST_CASE("A thicker shell moves nothing inside it", "[witness]") {
  Problem problem = box(3, poor_face(3), 10);
  PlaneWave wave;
  wave.box_lo = {5, 5, 5};
  wave.box_hi = {9, 9, 9};
  problem.plane_wave = wave;
  FaceChoice faces{};
  faces[0] = faces[5] = true;
  const Problem witness = with_witness_shell(problem, faces).problem;
  CHECK(witness.lattice.dt_s == problem.lattice.dt_s);
  const Lattice &a = problem.lattice, &b = witness.lattice;
  for (const Axis axis : all_axes) {
    const int shift = b.clear_node(side_of(axis, false)) - a.clear_node(side_of(axis, false));
    for (int i = 0; i < a.along(axis).nodes(); ++i)  // clear volume and old shell, bit for bit
      CHECK(b.along(axis).node_m(i + shift) == a.along(axis).node_m(i));
    CHECK(b.clear_cells(axis).size() == a.clear_cells(axis).size());
    const auto n = static_cast<std::size_t>(index_of(axis));
    CHECK(witness.plane_wave->box_lo[n] == wave.box_lo[n] + shift);
    CHECK(witness.plane_wave->box_hi[n] == wave.box_hi[n] + shift);
  }
  CHECK(b.along(Axis::x).is_uniform());
  for (const Side side : all_sides) {
    const bool chosen = side == Side::x_lo || side == Side::z_hi;
    CHECK((b.shell(side) > 3) == chosen);
    CHECK(witness.face(side).cells() == b.shell(side));
    CHECK((witness.face(side).kind == FaceKind::cfs_pml) == !chosen);
  }
}

TEST_CASE("A wall is no face for a witness", "[witness]") {
  Problem problem = box(3, poor_face(3), 10);
  problem.faces[2] = Face{};
  problem.lattice.shell_cells[2] = 0;
  CHECK_FALSE(absorbing_faces(problem)[2]);
  FaceChoice faces{};
  faces[2] = true;
  CHECK_THROWS_AS(with_witness_shell(problem, faces), ProblemError);
}

TEST_CASE("A witness comes near a lattice so large that nothing returns", "[witness]") {
  // Walls 61 cells away: a signal moves at most one cell per step, so 120 steps bring nothing back.
  constexpr long steps = 120;
  const Problem large = box(61, Face{}, steps);
  const RunResult truth = result_of(large);
  const Problem problem = box(3, poor_face(3), steps);
  const double poor_db = difference_db(large, truth, problem, result_of(problem));
  CHECK(poor_db > -40.0);
  const Witness witness = with_witness_shell(problem, absorbing_faces(problem));
  const double witness_db = difference_db(large, truth, witness.problem, result_of(witness.problem));
  CAPTURE(poor_db, witness_db, witness.floor_db);
  CHECK(witness_db < -160.0);
  CHECK(witness_db < witness.floor_db + 10.0);
  CHECK(witness.floor_db < -160.0);
}
