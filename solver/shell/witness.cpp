#include "solver/shell/witness.hpp"

#include <algorithm>
#include <cmath>
#include <complex>
#include <limits>
#include <set>
#include <string>
#include <vector>

#include "geometry/constants.hpp"
#include "geometry/painter.hpp"
#include "solver/shell/lattice_reflection.hpp"

namespace wanewall {
namespace {

constexpr int witness_cells = 40;

/// A graded layer so long and slow that little of it shows; the conductivities scale with 1/cell.
LayerTable witness_layer(double cell_m, double permittivity_rel) {
  PolynomialGrading grading;
  grading.order = 4.0;
  grading.sigma_max_s_per_m = sigma_max_rule(grading.order, cell_m, permittivity_rel);
  grading.kappa_max = 7.0;
  grading.alpha_max_s_per_m = 0.0377 / (eta0_ohm * cell_m);
  return polynomial_layer(grading, witness_cells);
}

std::size_t index(Side side) {
  return static_cast<std::size_t>(index_of(side));
}

/// Node positions of a side's shell, outwards from the clear volume's end, that end itself left out.
std::vector<double> shell_nodes_m(const Lattice& lattice, Side side, int cells) {
  const MeshLines& lines = lattice.along(axis_of(side));
  const int step = is_high(side) ? 1 : -1, had = lattice.shell(side), clear = lattice.clear_node(side);
  std::vector<double> nodes_m;
  for (int d = 1; d <= std::min(had, cells); ++d) nodes_m.push_back(lines.node_m(clear + step * d));
  const double cell_m = lines.cell_m(is_high(side) ? lines.cells() - 1 : 0);
  const double last_m = nodes_m.empty() ? lines.node_m(clear) : nodes_m.back();
  for (int d = 1; static_cast<int>(nodes_m.size()) < cells; ++d)
    nodes_m.push_back(last_m + step * d * cell_m);
  return nodes_m;
}

}  // namespace

FaceChoice absorbing_faces(const Problem& problem) {
  FaceChoice faces{};
  for (const Side side : all_sides) faces[index(side)] = absorbs(problem.face(side).kind);
  return faces;
}

Problem with_witness_shell(const Problem& problem, const FaceChoice& faces) {
  Problem witness = problem;
  const double background_rel =
      problem.media.at(static_cast<std::size_t>(problem.background)).permittivity_rel;
  for (const Side side : all_sides) {
    if (!faces[index(side)]) continue;
    if (!absorbs(problem.face(side).kind))
      throw ProblemError("face " + std::string(name_of(side)) + " is of kind " +
                         std::string(name_of(problem.face(side).kind)) +
                         "\n  allowed: faces that absorb\n  next: name other faces for the witness");
    const MeshLines& lines = problem.lattice.along(axis_of(side));
    const double cell_m = lines.cell_m(is_high(side) ? lines.cells() - 1 : 0);
    Face face;
    face.kind = FaceKind::cfs_pml;
    face.layer = witness_layer(cell_m, background_rel);
    witness.lattice.shell_cells[index(side)] = face.cells();
    witness.faces[index(side)] = std::move(face);
  }
  Index3 shift{};
  for (const Axis axis : all_axes) {
    const Side lo = side_of(axis, false), hi = side_of(axis, true);
    std::vector<double> nodes_m = shell_nodes_m(problem.lattice, lo, witness.lattice.shell(lo));
    std::reverse(nodes_m.begin(), nodes_m.end());
    for (int i = problem.lattice.clear_node(lo); i <= problem.lattice.clear_node(hi); ++i)
      nodes_m.push_back(problem.lattice.along(axis).node_m(i));
    const std::vector<double> outside_m = shell_nodes_m(problem.lattice, hi, witness.lattice.shell(hi));
    nodes_m.insert(nodes_m.end(), outside_m.begin(), outside_m.end());
    const auto a = static_cast<std::size_t>(index_of(axis));
    witness.lattice.lines[a] = MeshLines(std::move(nodes_m));
    shift[a] = witness.lattice.shell(lo) - problem.lattice.shell(lo);
  }
  if (witness.plane_wave) {
    for (std::size_t a = 0; a < 3; ++a) {
      witness.plane_wave->box_lo[a] += shift[a];
      witness.plane_wave->box_hi[a] += shift[a];
    }
  }
  return witness;
}

std::string witness_layer_text() {
  return std::string(name_of(FaceKind::cfs_pml)) + ", " + std::to_string(witness_cells) + " cells";
}

namespace {

/// Media that touch a face, sampled at the middle of every cell of its plane.
std::set<int> media_at(const Problem& problem, Side side) {
  const Painter painter(problem.lattice, problem.media, problem.objects, problem.background);
  const Axis normal = axis_of(side), u = next(normal), v = previous(normal);
  const auto at = [](Axis a) { return static_cast<std::size_t>(index_of(a)); };
  Vec3 point_m{};
  point_m[at(normal)] = problem.lattice.along(normal).node_m(problem.lattice.clear_node(side));
  std::set<int> media;
  for (int i = 0; i < problem.lattice.cells(u); ++i) {
    for (int j = 0; j < problem.lattice.cells(v); ++j) {
      point_m[at(u)] = problem.lattice.along(u).half_m(i);
      point_m[at(v)] = problem.lattice.along(v).half_m(j);
      media.insert(painter.medium_at(point_m));
    }
  }
  return media;
}

double reflection_db(const Problem& problem, Side side, const Medium& medium, double frequency_hz,
                     double angle_rad) {
  const double omega = 2.0 * pi * frequency_hz, dt_s = problem.lattice.dt_s;
  const double lattice_w = lattice_omega(omega, dt_s);
  const std::complex<double> y(medium.conductivity_s_per_m * std::cos(0.5 * omega * dt_s),
                               lattice_w * eps0_f_per_m * medium.permittivity_rel);
  const std::complex<double> z(medium.magnetic_conductivity_ohm_per_m * std::cos(0.5 * omega * dt_s),
                               lattice_w * mu0_h_per_m * medium.permeability_rel);
  const double cosine = std::cos(angle_rad);
  const double cell_m = problem.lattice.along(axis_of(side)).smallest_cell_m();
  return 20.0 * std::log10(std::abs(layer_reflection(problem.face(side).layer, cell_m, dt_s, omega,
                                                     -y * z * cosine * cosine)));
}

}  // namespace

PredictedFloor predicted_floor(const Problem& problem, const FaceChoice& faces,
                               const std::vector<double>& frequencies_hz) {
  constexpr int largest_angle_deg = 80;
  PredictedFloor floor;
  floor.worst_db = -std::numeric_limits<double>::infinity();
  for (const Side side : all_sides) {
    if (!faces[index(side)]) continue;
    for (const int m : media_at(problem, side)) {
      const Medium& medium = problem.media.at(static_cast<std::size_t>(m));
      if (medium.is_perfect()) continue;
      for (const double frequency_hz : frequencies_hz) {
        for (int degrees = 0; degrees <= largest_angle_deg; degrees += 2) {
          const double angle_rad = degrees * pi / 180.0;
          const double db = reflection_db(problem, side, medium, frequency_hz, angle_rad);
          if (db > floor.worst_db) floor = {db, side, frequency_hz, angle_rad};
        }
      }
    }
  }
  return floor;
}

}  // namespace wanewall
