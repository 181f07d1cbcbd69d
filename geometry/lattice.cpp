#include "geometry/lattice.hpp"

#include <algorithm>
#include <cmath>
#include <stdexcept>
#include <string>

#include "geometry/constants.hpp"

namespace wanewall {

std::string_view name_of(Axis a) {
  constexpr std::array<std::string_view, 3> names{"x", "y", "z"};
  return names[static_cast<std::size_t>(index_of(a))];
}

std::string_view name_of(Side s) {
  constexpr std::array<std::string_view, 6> names{"x-", "x+", "y-", "y+", "z-", "z+"};
  return names[static_cast<std::size_t>(index_of(s))];
}

std::string_view name_of(Component c) {
  constexpr std::array<std::string_view, 6> names{"Ex", "Ey", "Ez", "Hx", "Hy", "Hz"};
  return names[static_cast<std::size_t>(index_of(c))];
}

MeshLines::MeshLines(std::vector<double> nodes_m) : nodes_m_(std::move(nodes_m)) {
  if (nodes_m_.size() < 2) throw std::invalid_argument("mesh lines need at least two nodes");
  for (std::size_t i = 0; i < nodes_m_.size(); ++i) {
    if (!std::isfinite(nodes_m_[i]) || (i > 0 && nodes_m_[i] <= nodes_m_[i - 1]))
      throw std::invalid_argument("mesh line " + std::to_string(i) + " does not lie above the one before it");
  }
}

MeshLines MeshLines::uniform(double first_node_m, double spacing_m, int cells) {
  std::vector<double> nodes(static_cast<std::size_t>(std::max(cells, 0)) + 1);
  for (std::size_t i = 0; i < nodes.size(); ++i) nodes[i] = first_node_m + static_cast<double>(i) * spacing_m;
  return MeshLines(std::move(nodes));
}

double MeshLines::dual_m(int i) const {
  if (i == 0) return cell_m(0);
  if (i == cells()) return cell_m(cells() - 1);
  return 0.5 * (cell_m(i - 1) + cell_m(i));
}

double MeshLines::smallest_cell_m() const {
  double smallest = cell_m(0);
  for (int i = 1; i < cells(); ++i) smallest = std::min(smallest, cell_m(i));
  return smallest;
}

double MeshLines::largest_cell_m() const {
  double largest = cell_m(0);
  for (int i = 1; i < cells(); ++i) largest = std::max(largest, cell_m(i));
  return largest;
}

bool MeshLines::is_uniform() const {
  const double span = std::max(std::abs(nodes_m_.front()), std::abs(nodes_m_.back()));
  return largest_cell_m() - smallest_cell_m() <= 1e-9 * largest_cell_m() + 1e-15 * span;
}

int MeshLines::nearest_node(double position_m) const {
  const auto above = std::lower_bound(nodes_m_.begin(), nodes_m_.end(), position_m);
  if (above == nodes_m_.begin()) return 0;
  if (above == nodes_m_.end()) return cells();
  const int i = static_cast<int>(above - nodes_m_.begin());
  return position_m - node_m(i - 1) < node_m(i) - position_m ? i - 1 : i;
}

double Lattice::n_cells() const {
  double product = 1.0;
  for (Axis a : all_axes) product *= cells(a);
  return product;
}

int Lattice::clear_node(Side s) const {
  return is_high(s) ? cells(axis_of(s)) - shell(s) : shell(s);
}

IndexRange Lattice::clear_cells(Axis a) const {
  return {clear_node(side_of(a, false)), clear_node(side_of(a, true))};
}

IndexRange Lattice::stored(Component c, Axis a) const {
  return {0, is_half(c, a) ? cells(a) : cells(a) + 1};
}

IndexRange Lattice::clear(Component c, Axis a) const {
  const IndexRange in_cells = clear_cells(a);
  return {in_cells.begin, is_half(c, a) ? in_cells.end : in_cells.end + 1};
}

double Lattice::position_m(Component c, Axis a, int i) const {
  return is_half(c, a) ? along(a).half_m(i) : along(a).node_m(i);
}

Vec3 Lattice::position_m(Component c, Index3 at) const {
  return {position_m(c, Axis::x, at[0]), position_m(c, Axis::y, at[1]), position_m(c, Axis::z, at[2])};
}

double Lattice::courant_limit_s() const {
  double sum = 0.0;
  for (Axis a : all_axes) {
    if (periodic[static_cast<std::size_t>(index_of(a))] && cells(a) == 1) continue;
    const double d = along(a).smallest_cell_m();
    sum += 1.0 / (d * d);
  }
  if (sum == 0.0) throw std::invalid_argument("a lattice needs an axis that is not a single periodic cell");
  return 1.0 / (c0_m_per_s * std::sqrt(sum));
}

}  // namespace wanewall
