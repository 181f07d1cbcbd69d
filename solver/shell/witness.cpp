#include "solver/shell/witness.hpp"

#include <algorithm>
#include <deque>
#include <limits>
#include <string>
#include <utility>
#include <vector>

#include "geometry/constants.hpp"
#include "solver/shell/design.hpp"
#include "solver/shell/surroundings.hpp"

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

/// As for any designed layer, but as if something stood right in front of the face.
DesignInputs witness_inputs(const Problem& problem, const ShellSurroundings& surroundings, Side side) {
  DesignOverrides cautious;
  cautious.clearance_cells = 1.0;
  return design_inputs(problem, surroundings, side, cautious);
}

bool are_equal(const DesignInputs& a, const DesignInputs& b) {
  return a.courant == b.courant && a.diagonal_cells == b.diagonal_cells && a.alpha_min == b.alpha_min &&
         a.clearance_cells == b.clearance_cells &&
         std::equal(a.frequencies.begin(), a.frequencies.end(), b.frequencies.begin(), b.frequencies.end(),
                    [](const DesignFrequency& f, const DesignFrequency& g) {
                      return f.wavelength_cells == g.wavelength_cells && f.index == g.index;
                    });
}

/// Layers designed face by face; faces that need the same share one.
class WitnessLayers {
 public:
  explicit WitnessLayers(const Problem& problem)
      : problem_(problem), surroundings_(surroundings_of(problem, band_without_a_pulse_hz(problem))) {}

  const Designed<MoebiusTable>& layer_for(Side side, double cell_m) {
    const DesignInputs inputs = witness_inputs(problem_, surroundings_, side);
    for (const auto& [known, designed] : layers_)
      if (are_equal(known, inputs)) return designed;
    layers_.emplace_back(inputs, design_moebius(inputs, witness_cells, cell_m));
    return layers_.back().second;
  }

 private:
  /// Ten cells per wavelength; without a pulse there is nothing to see.
  static double band_without_a_pulse_hz(const Problem& problem) {
    return c0_m_per_s / (10.0 * problem.lattice.lines[0].largest_cell_m());
  }

  const Problem& problem_;
  ShellSurroundings surroundings_;
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
  WitnessLayers layers(problem);
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
    const Designed<MoebiusTable>& designed = layers.layer_for(side, cell_m);
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
