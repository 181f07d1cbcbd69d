#include "solver/shell/witness.hpp"

#include <algorithm>
#include <cmath>
#include <complex>
#include <deque>
#include <limits>
#include <set>
#include <string>
#include <utility>
#include <vector>

#include "geometry/constants.hpp"
#include "geometry/painter.hpp"
#include "solver/shell/design.hpp"

namespace wanewall {
namespace {

constexpr int witness_cells = 20;
static_assert(witness_cells <= most_designed_cells);

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

/// The pulse of whatever lights the problem; null when nothing does.
const Pulse* pulse_of(const Problem& problem) {
  if (problem.plane_wave) return &problem.plane_wave->pulse;
  return problem.dipoles.empty() ? nullptr : &problem.dipoles.front().pulse;
}

double largest_index(const Problem& problem, const std::set<int>& media, double frequency_hz) {
  double index = 1.0;
  for (const int m : media) {
    const Medium& medium = problem.media.at(static_cast<std::size_t>(m));
    if (medium.is_perfect()) continue;
    const std::complex<double> permittivity(
        medium.permittivity_rel, -medium.conductivity_s_per_m / (2.0 * pi * frequency_hz * eps0_f_per_m));
    index = std::max(index, std::sqrt(std::abs(permittivity) * medium.permeability_rel));
  }
  return index;
}

/// Cautious throughout: one cell of clearance, the pulse down to -80 dB of its peak, and waves slow enough
/// for what is left behind when the run is long.
DesignInputs witness_inputs(const Problem& problem, Side side, double cell_m) {
  constexpr double pulse_end_level = 1e-4;
  constexpr double largest_wavelength_cells = 20000.0;
  const double dt_s = problem.lattice.dt_s;
  DesignInputs inputs;
  inputs.courant = c0_m_per_s * dt_s / cell_m;
  double diagonal2 = 0.0;
  for (const Axis axis : all_axes) {
    if (problem.lattice.periodic[static_cast<std::size_t>(index_of(axis))]) continue;
    const MeshLines& lines = problem.lattice.along(axis);
    const double length_m = lines.node_m(problem.lattice.clear_node(side_of(axis, true))) -
                            lines.node_m(problem.lattice.clear_node(side_of(axis, false)));
    diagonal2 += length_m * length_m;
  }
  inputs.diagonal_cells = std::sqrt(diagonal2) / cell_m;
  inputs.clearance_cells = 1.0;
  inputs.alpha_min = 0.12 / inputs.diagonal_cells;

  const Pulse* pulse = pulse_of(problem);
  const double highest_hz = pulse != nullptr ? spectrum_end_hz(*pulse, pulse_end_level) : 0.0;
  const double shortest_cells = highest_hz > 0.0 ? std::max(2.5, c0_m_per_s / (highest_hz * cell_m)) : 10.0;
  double longest_cells = std::max({300.0, 8.0 * inputs.diagonal_cells, 2.0 * shortest_cells});
  const bool is_long = static_cast<double>(problem.last_step()) > 2.0 * longest_cells / inputs.courant;
  if (is_long) longest_cells = std::max(longest_cells, largest_wavelength_cells);
  const int n = is_long ? 18 : 12;
  const std::set<int> media = media_at(problem, side);
  for (int i = 0; i < n; ++i) {
    const double cells = shortest_cells * std::pow(longest_cells / shortest_cells, i / (n - 1.0));
    inputs.frequencies.push_back({cells, largest_index(problem, media, c0_m_per_s / (cells * cell_m))});
  }
  return inputs;
}

bool are_equal(const DesignInputs& a, const DesignInputs& b) {
  return a.courant == b.courant && a.diagonal_cells == b.diagonal_cells &&
         std::equal(a.frequencies.begin(), a.frequencies.end(), b.frequencies.begin(), b.frequencies.end(),
                    [](const DesignFrequency& f, const DesignFrequency& g) {
                      return f.wavelength_cells == g.wavelength_cells && f.index == g.index;
                    });
}

/// Layers designed face by face; faces that need the same share one.
class WitnessLayers {
 public:
  const Designed<MoebiusTable>& layer_for(const Problem& problem, Side side, double cell_m) {
    const DesignInputs inputs = witness_inputs(problem, side, cell_m);
    for (const auto& [known, designed] : layers_)
      if (are_equal(known, inputs)) return designed;
    layers_.emplace_back(inputs, design_moebius(inputs, witness_cells, cell_m));
    return layers_.back().second;
  }

 private:
  std::deque<std::pair<DesignInputs, Designed<MoebiusTable>>> layers_;
};

}  // namespace

FaceChoice absorbing_faces(const Problem& problem) {
  FaceChoice faces{};
  for (const Side side : all_sides) faces[index(side)] = absorbs(problem.face(side).kind);
  return faces;
}

Witness with_witness_shell(const Problem& problem, const FaceChoice& faces) {
  Witness result{problem, -std::numeric_limits<double>::infinity(), Side::x_lo};
  Problem& witness = result.problem;
  WitnessLayers layers;
  for (const Side side : all_sides) {
    if (!faces[index(side)]) continue;
    if (!absorbs(problem.face(side).kind))
      throw ProblemError("face " + std::string(name_of(side)) + " is of kind " +
                         std::string(name_of(problem.face(side).kind)) +
                         "\n  allowed: faces that absorb\n  next: name other faces for the witness");
    const MeshLines& lines = problem.lattice.along(axis_of(side));
    const double cell_m = lines.cell_m(is_high(side) ? lines.cells() - 1 : 0);
    Face face;
    face.kind = FaceKind::moebius;
    const Designed<MoebiusTable>& designed = layers.layer_for(problem, side, cell_m);
    face.moebius = designed.table;
    if (designed.figures.worst_db > result.floor_db) {
      result.floor_db = designed.figures.worst_db;
      result.floor_side = side;
    }
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
  return result;
}

std::string witness_layer_text() {
  return std::string(name_of(FaceKind::moebius)) + ", " + std::to_string(witness_cells) + " cells";
}

}  // namespace wanewall
