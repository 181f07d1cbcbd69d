// Small problems for the tests of the solver, built as plain data.
#pragma once

#include <algorithm>
#include <cmath>

#include "geometry/constants.hpp"
#include "solver/marcher.hpp"
#include "solver/results.hpp"

namespace wanewall::test {

struct NoSink : Sink {
  void take(Snapshot) override {}
};
struct NoMonitor : Monitor {
  bool go_on(const Progress&) override { return true; }
};

/// A vacuum lattice whose low outer corner is the origin; `shell` cells of shell on every side are part of
/// `cells`.
inline Problem vacuum_problem(Index3 cells, Vec3 cell_m, double courant = 0.99) {
  Problem problem;
  problem.precision = Precision::double_precision;
  problem.media.push_back({"vacuum", 1.0, 1.0, 0.0, 0.0, false, false});
  for (std::size_t a = 0; a < 3; ++a) problem.lattice.lines[a] = MeshLines::uniform(0.0, cell_m[a], cells[a]);
  problem.lattice.dt_s = courant * problem.lattice.courant_limit_s();
  problem.threads = 2;
  return problem;
}

/// Sets one face; `cells` of layer on that side.
inline void set_face(Problem& problem, Side side, FaceKind kind, const LayerTable& layer = {}) {
  problem.faces[static_cast<std::size_t>(index_of(side))] = {kind, layer, {}, 1};
  problem.lattice.shell_cells[static_cast<std::size_t>(index_of(side))] = layer.cells();
  problem.lattice.periodic[static_cast<std::size_t>(index_of(axis_of(side)))] = kind == FaceKind::periodic;
}

inline void set_periodic(Problem& problem, Axis axis) {
  set_face(problem, side_of(axis, false), FaceKind::periodic);
  set_face(problem, side_of(axis, true), FaceKind::periodic);
}

/// Keeps the Courant number when sides became periodic.
inline void set_courant(Problem& problem, double courant) {
  problem.lattice.dt_s = courant * problem.lattice.courant_limit_s();
}

inline double db(double amplitude_ratio) {
  return 20.0 * std::log10(std::max(amplitude_ratio, 1e-300));
}
inline double degrees(double deg) {
  return deg * pi / 180.0;
}

}  // namespace wanewall::test
