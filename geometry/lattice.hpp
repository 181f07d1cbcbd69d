// The rectilinear Yee lattice: mesh lines, where each field component lives, and which indices exist.
//
//   component   position                      time
//   ex          (i+1/2, j,     k    )         n dt
//   ey          (i,     j+1/2, k    )         n dt
//   ez          (i,     j,     k+1/2)         n dt
//   hx          (i,     j+1/2, k+1/2)         (n+1/2) dt
//   hy          (i+1/2, j,     k+1/2)         (n+1/2) dt
//   hz          (i+1/2, j+1/2, k    )         (n+1/2) dt
//
// Indices count from the outer wall on the low side: node 0 is the wall, cell 0 the first cell inside it.
// Every "+1" between cells and nodes stands in this file and nowhere else.
// Source: K. S. Yee, IEEE Trans. Antennas Propag. 14, 302 (1966).
#pragma once

#include <array>
#include <string_view>
#include <vector>

namespace wanewall {

using Vec3 = std::array<double, 3>;
using Index3 = std::array<int, 3>;

enum class Axis { x, y, z };
inline constexpr std::array<Axis, 3> all_axes{Axis::x, Axis::y, Axis::z};

enum class Side { x_lo, x_hi, y_lo, y_hi, z_lo, z_hi };
inline constexpr std::array<Side, 6> all_sides{Side::x_lo, Side::x_hi, Side::y_lo,
                                               Side::y_hi, Side::z_lo, Side::z_hi};

enum class Component { ex, ey, ez, hx, hy, hz };
inline constexpr std::array<Component, 6> all_components{Component::ex, Component::ey, Component::ez,
                                                         Component::hx, Component::hy, Component::hz};

constexpr int index_of(Axis a) {
  return static_cast<int>(a);
}
constexpr int index_of(Side s) {
  return static_cast<int>(s);
}
constexpr int index_of(Component c) {
  return static_cast<int>(c);
}

constexpr Axis axis_of(Side s) {
  return static_cast<Axis>(index_of(s) / 2);
}
constexpr bool is_high(Side s) {
  return index_of(s) % 2 == 1;
}
constexpr Side side_of(Axis a, bool high) {
  return static_cast<Side>(2 * index_of(a) + (high ? 1 : 0));
}
constexpr Side opposite(Side s) {
  return side_of(axis_of(s), !is_high(s));
}

constexpr bool is_electric(Component c) {
  return index_of(c) < 3;
}
constexpr Axis axis_of(Component c) {
  return static_cast<Axis>(index_of(c) % 3);
}
constexpr Component electric(Axis a) {
  return static_cast<Component>(index_of(a));
}
constexpr Component magnetic(Axis a) {
  return static_cast<Component>(3 + index_of(a));
}

/// The two axes across a normal, in cyclic order: x -> (y, z), y -> (z, x), z -> (x, y).
constexpr Axis next(Axis a) {
  return static_cast<Axis>((index_of(a) + 1) % 3);
}
constexpr Axis previous(Axis a) {
  return static_cast<Axis>((index_of(a) + 2) % 3);
}

/// Whether the component sits half a cell up from its index along the axis.
constexpr bool is_half(Component c, Axis a) {
  return is_electric(c) == (axis_of(c) == a);
}

std::string_view name_of(Axis a);       ///< "x", "y", "z"
std::string_view name_of(Side s);       ///< "x-", "x+", ...
std::string_view name_of(Component c);  ///< "Ex", ..., "Hz"

/// Half-open range of indices.
struct IndexRange {
  int begin = 0;
  int end = 0;
  int size() const { return end > begin ? end - begin : 0; }
  bool contains(int i) const { return begin <= i && i < end; }
  bool operator==(const IndexRange&) const = default;
};

/// Strictly increasing node positions along one axis [m].
class MeshLines {
 public:
  MeshLines() = default;
  /// Throws std::invalid_argument unless there are at least two finite, strictly increasing nodes.
  explicit MeshLines(std::vector<double> nodes_m);
  static MeshLines uniform(double first_node_m, double spacing_m, int cells);

  int cells() const { return static_cast<int>(nodes_m_.size()) - 1; }
  int nodes() const { return static_cast<int>(nodes_m_.size()); }
  double node_m(int i) const { return nodes_m_[static_cast<std::size_t>(i)]; }
  double half_m(int i) const { return 0.5 * (node_m(i) + node_m(i + 1)); }
  /// Length of cell i: the distance between the nodes at its ends.
  double cell_m(int i) const { return node_m(i + 1) - node_m(i); }
  /// Distance between the half nodes on both sides of node i. On an outer wall the lattice is mirrored.
  double dual_m(int i) const;
  double smallest_cell_m() const;
  double largest_cell_m() const;
  /// True when all cells are equal to within rounding.
  bool is_uniform() const;
  const std::vector<double>& all_m() const { return nodes_m_; }
  /// Index of the node nearest to a position.
  int nearest_node(double position_m) const;

 private:
  std::vector<double> nodes_m_;
};

/// Mesh lines of the whole lattice (clear volume and shell), which part of it is clear, and the time step.
struct Lattice {
  std::array<MeshLines, 3> lines;
  /// Cells of shell on each side, indexed by Side. Zero for walls and periodic sides.
  std::array<int, 6> shell_cells{};
  /// Axes whose two faces are joined.
  std::array<bool, 3> periodic{};
  double dt_s = 0.0;

  const MeshLines& along(Axis a) const { return lines[static_cast<std::size_t>(index_of(a))]; }
  int cells(Axis a) const { return along(a).cells(); }
  Index3 cells() const { return {cells(Axis::x), cells(Axis::y), cells(Axis::z)}; }
  double n_cells() const;
  int shell(Side s) const { return shell_cells[static_cast<std::size_t>(index_of(s))]; }

  /// Node where the clear volume ends on a side: the shell's first node, or the wall itself.
  int clear_node(Side s) const;
  /// Cells of the clear volume along an axis.
  IndexRange clear_cells(Axis a) const;

  /// Indices that exist along an axis: cells for half positions, cells + 1 for nodes. On a periodic axis the
  /// last node is an image of the first and is stored too.
  IndexRange stored(Component c, Axis a) const;
  /// Indices inside the closed clear volume along an axis.
  IndexRange clear(Component c, Axis a) const;

  double position_m(Component c, Axis a, int i) const;
  Vec3 position_m(Component c, Index3 at) const;

  /// Largest stable time step: c0 dt <= 1 / sqrt(sum 1/d^2). An axis that is one periodic cell wide carries
  /// no variation and does not count. Source: A. Taflove and S. C. Hagness, Computational Electrodynamics,
  /// 3rd ed.
  double courant_limit_s() const;
  double courant_number() const { return dt_s / courant_limit_s(); }
};

/// dt_s and time levels: E at n dt, H half a step later.
constexpr double time_of_e_s(long step, double dt_s) {
  return static_cast<double>(step) * dt_s;
}
constexpr double time_of_h_s(long step, double dt_s) {
  return (static_cast<double>(step) + 0.5) * dt_s;
}

}  // namespace wanewall
