#include "solver/shell/one_way.hpp"

#include <algorithm>
#include <cmath>
#include <string>

#include "geometry/constants.hpp"

namespace wanewall {
namespace {

std::size_t at(Axis a) {
  return static_cast<std::size_t>(index_of(a));
}

}  // namespace

template <class Real>
OneWayWalls<Real>::OneWayWalls(const Problem& problem, const RowLayout& layout,
                               const MediaRows<Real>& e_media, const MediaRows<Real>& h_media)
    : problem_(problem), layout_(layout) {
  for (const Axis axis : {Axis::z, Axis::y, Axis::x})  // the last to be set decides
    for (const bool high : {false, true})
      if (problem.face(side_of(axis, high)).kind == FaceKind::one_way)
        add_wall(side_of(axis, high), e_media, h_media);
}

template <class Real>
bool OneWayWalls<Real>::has(Side side) const {
  return std::any_of(walls_.begin(), walls_.end(), [&](const Wall& wall) { return wall.side == side; });
}

template <class Real>
void OneWayWalls<Real>::add_wall(Side side, const MediaRows<Real>& e_media, const MediaRows<Real>& h_media) {
  const Axis normal = axis_of(side);
  const MeshLines& lines = problem_.lattice.along(normal);
  const int n = lines.cells();
  if (n < 3)
    throw ProblemError(
        "face " + std::string(name_of(side)) +
        ": a one_way wall needs at least three cells along its normal / widen the clear volume");
  const int order = problem_.face(side).one_way_order;
  if (order != 1 && order != 2)
    throw ProblemError("face " + std::string(name_of(side)) + ": one_way of order " + std::to_string(order) +
                       " / 1 or 2");
  Wall wall;
  wall.side = side;
  wall.order = order;
  wall.spacing_m = lines.cell_m(is_high(side) ? n - 1 : 0);
  wall.component = {index_of(next(normal)), index_of(next(next(normal)))};
  wall.extent = {normal == Axis::x ? 1 : layout_.nx + 1, normal == Axis::y ? 1 : layout_.ny + 1};
  wall.length = normal == Axis::z ? 1 : static_cast<int>(layout_.row);
  const auto size = static_cast<std::size_t>(wall.extent[0]) * static_cast<std::size_t>(wall.extent[1]) *
                    static_cast<std::size_t>(wall.length);
  for (auto& values : wall.past) values.assign(size, Real(0));
  const double c_dt = c0_m_per_s * problem_.lattice.dt_s, d = wall.spacing_m;
  const int wall_node = is_high(side) ? n : 0;
  for (std::size_t c = 0; c < 2; ++c) {
    wall.a[c].assign(size, Real(0));
    wall.g[c].assign(size, Real(-1));
    const Axis along = static_cast<Axis>(wall.component[c]);
    std::size_t entry = 0;
    for (int i = 0; i < wall.extent[0]; ++i)
      for (int j = 0; j < wall.extent[1]; ++j)
        for (int m = 0; m < wall.length; ++m, ++entry) {
          Index3 node{i, j, m};
          node[at(normal)] = wall_node;
          if (node[2] > layout_.nz || node[at(along)] >= problem_.lattice.cells(along)) continue;
          const UpdateCoefficients e = e_media.row(node[0], node[1]).at(wall.component[c], node[2]);
          if (e.gain == 0.0) continue;
          // mu of H across E, half a cell inside.
          Index3 inside = node;
          if (is_high(side)) --inside[at(normal)];
          const int other = 3 - index_of(normal) - wall.component[c];
          const UpdateCoefficients h = h_media.row(inside[0], inside[1]).at(other, inside[2]);
          const double eps = 0.5 * c_dt * (1.0 + e.decay) / e.gain;
          const double mu = h.gain == 0.0 ? 1.0 : 0.5 * c_dt * (1.0 + h.decay) / h.gain;
          const double step = c_dt / std::sqrt(eps * mu);
          wall.a[c][entry] = static_cast<Real>((step - d) / (step + d));
          wall.g[c][entry] = static_cast<Real>(d * step * step / (2.0 * (step + d)));
        }
  }
  walls_.push_back(std::move(wall));
}

/// Mirrors at electric walls: tangential E, at nodes, is zero there and E along the normal, at half nodes, is
/// even; at magnetic walls the other way round.
template <class Real>
typename OneWayWalls<Real>::Beside OneWayWalls<Real>::beside(Axis axis, bool half, int index,
                                                             int step) const {
  const int n = problem_.lattice.cells(axis), to = index + step;
  if (problem_.lattice.periodic[at(axis)]) return {(to + n) % n, 1};
  if (to >= 0 && to <= (half ? n - 1 : n)) return {to, 1};
  const Side side = side_of(axis, step > 0);
  if (problem_.face(side).kind == FaceKind::magnetic_wall)
    return half ? Beside{index, -1} : Beside{index - step, 1};
  if (wall_is_electric(problem_, side)) return half ? Beside{index, 1} : Beside{index - step, -1};
  return {0, 0};
}

template <class Real>
void OneWayWalls<Real>::move(Wall& wall, int component, int i, int j, long step, Real* row) {
  const Axis normal = axis_of(wall.side);
  const auto c = static_cast<std::size_t>(component);
  const Axis along = static_cast<Axis>(wall.component[c]);
  const auto entry = [&](int row_i, int row_j) {
    const int first = normal == Axis::x ? 0 : row_i, second = normal == Axis::y ? 0 : row_j;
    return (static_cast<std::size_t>(first) * static_cast<std::size_t>(wall.extent[1]) +
            static_cast<std::size_t>(second)) *
           static_cast<std::size_t>(wall.length);
  };
  const auto values = [&](long at_step, int node, int row_i, int row_j) {
    return wall.past[slot(at_step, component, node)].data() + entry(row_i, row_j);
  };
  Real* const e0 = values(step, 0, i, j);
  const Real* const e1 = values(step, 1, i, j);
  const Real *const e0_old = values(step - 1, 0, i, j), *const e1_old = values(step - 1, 1, i, j);
  const Real *const e0_older = values(step - 2, 0, i, j), *const e1_older = values(step - 2, 1, i, j);
  const Real *const a = wall.a[c].data() + entry(i, j), *const g = wall.g[c].data() + entry(i, j);
  // The rows beside this one along the wall, and the weight of their second difference.
  struct Pair {
    Beside lower, upper;
    Real weight;
  };
  const auto pair = [&](Axis axis, int index) {
    const double spacing = problem_.lattice.along(axis).smallest_cell_m();
    const bool half = axis == along;
    return Pair{beside(axis, half, index, -1), beside(axis, half, index, 1),
                static_cast<Real>(1.0 / (spacing * spacing))};
  };
  const bool x = normal != Axis::x, y = normal != Axis::y;
  const Pair in_x = x ? pair(Axis::x, i) : Pair{}, in_y = y ? pair(Axis::y, j) : Pair{};
  const bool rows_complete =
      (!x || (in_x.lower.sign && in_x.upper.sign)) && (!y || (in_y.lower.sign && in_y.upper.sign));
  const auto sum = [&](int row_i, int row_j, int m) {
    return values(step - 1, 0, row_i, row_j)[m] + values(step - 1, 1, row_i, row_j)[m];
  };
  const int count = normal == Axis::z ? 1 : (along == Axis::z ? layout_.nz : layout_.nz + 1);
  for (int m = 0; m < count; ++m) {
    if (g[m] < Real(0)) {
      e0[m] = Real(0);
      continue;
    }
    bool second = wall.order == 2 && rows_complete;
    Pair in_z{};
    if (second && normal != Axis::z) {
      in_z = pair(Axis::z, m);
      second = in_z.lower.sign && in_z.upper.sign;
    }
    if (!second) {
      e0[m] = e1_old[m] + a[m] * (e1[m] - e0_old[m]);
      continue;
    }
    const Real here = e0_old[m] + e1_old[m];
    Real across = Real(0);
    const auto add = [&](const Pair& p, Real lower, Real upper) {
      across += p.weight * ((Real(p.upper.sign) * upper - here) - (here - Real(p.lower.sign) * lower));
    };
    if (x) add(in_x, sum(in_x.lower.index, j, m), sum(in_x.upper.index, j, m));
    if (y) add(in_y, sum(i, in_y.lower.index, m), sum(i, in_y.upper.index, m));
    if (normal != Axis::z) add(in_z, sum(i, j, in_z.lower.index), sum(i, j, in_z.upper.index));
    e0[m] = a[m] * (e1[m] + e0_older[m]) - e1_older[m] + (Real(1) - a[m]) * here + g[m] * across;
  }
  if (normal == Axis::z)
    row[is_high(wall.side) ? layout_.nz : 0] = e0[0];
  else
    std::copy(e0, e0 + count, row);
}

template <class Real>
void OneWayWalls<Real>::finish_row(int i, int j, long step, Fields<Real>& fields) {
  const auto visit = [&](const auto& action) {
    for (Wall& wall : walls_) {
      const Axis normal = axis_of(wall.side);
      const int n = problem_.lattice.cells(normal);
      const int on_wall = is_high(wall.side) ? n : 0, inside = is_high(wall.side) ? n - 1 : 1;
      const int index = normal == Axis::x ? i : j;
      if (normal != Axis::z && index != on_wall && index != inside) continue;
      const int first = normal == Axis::x ? 0 : i, second = normal == Axis::y ? 0 : j;
      const auto entry = (static_cast<std::size_t>(first) * static_cast<std::size_t>(wall.extent[1]) +
                          static_cast<std::size_t>(second)) *
                         static_cast<std::size_t>(wall.length);
      for (int c = 0; c < 2; ++c) {
        const auto along = static_cast<Axis>(wall.component[static_cast<std::size_t>(c)]);
        action(wall, c, entry, fields.row(electric(along), i, j), normal == Axis::z || index == inside,
               normal == Axis::z || index == on_wall, on_wall, inside);
      }
    }
  };
  visit([&](Wall& wall, int c, std::size_t entry, Real* row, bool has_inside, bool has_wall, int,
            int inside) {
    const bool whole_row = axis_of(wall.side) != Axis::z;
    if (has_inside)
      std::copy_n(whole_row ? row : row + inside, wall.length, wall.past[slot(step, c, 1)].data() + entry);
    if (has_wall) move(wall, c, i, j, step, row);
  });
  // Where walls meet, all remember what the last of them decided.
  if (walls_.size() < 2) return;
  visit([&](Wall& wall, int c, std::size_t entry, Real* row, bool has_inside, bool has_wall, int on_wall,
            int inside) {
    const bool whole_row = axis_of(wall.side) != Axis::z;
    if (has_inside)
      std::copy_n(whole_row ? row : row + inside, wall.length, wall.past[slot(step, c, 1)].data() + entry);
    if (has_wall)
      std::copy_n(whole_row ? row : row + on_wall, wall.length, wall.past[slot(step, c, 0)].data() + entry);
  });
}

template <class Real>
void OneWayWalls<Real>::append_state(std::vector<std::span<Real>>& state) {
  for (Wall& wall : walls_)
    for (std::vector<Real>& values : wall.past) state.emplace_back(values);
}

template <class Real>
std::size_t OneWayWalls<Real>::bytes(const Problem& problem, const RowLayout& layout) {
  constexpr double values_per_node = 12.0 + 4.0;  // the past, a and g
  double nodes = 0.0;
  for (Side side : all_sides) {
    if (problem.face(side).kind != FaceKind::one_way) continue;
    const Axis normal = axis_of(side);
    nodes += (normal == Axis::x ? 1.0 : layout.nx + 1.0) * (normal == Axis::y ? 1.0 : layout.ny + 1.0) *
             (normal == Axis::z ? 1.0 : static_cast<double>(layout.row));
  }
  return static_cast<std::size_t>(values_per_node * nodes * sizeof(Real));
}

template class OneWayWalls<float>;
template class OneWayWalls<double>;

}  // namespace wanewall
