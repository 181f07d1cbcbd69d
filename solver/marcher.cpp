#include "solver/marcher.hpp"

#include <omp.h>

#include <algorithm>
#include <cmath>
#include <exception>
#include <stdexcept>

#include "geometry/constants.hpp"
#include "solver/flush_denormals.hpp"
#include "solver/pinned_thread.hpp"

namespace wanewall {
namespace {

template <class Real>
std::array<Stretch<Real>, 3> make_stretches(const Problem& problem, const RowLayout& layout, bool electric) {
  return {make_stretch<Real>(problem, Axis::x, electric, layout.nx + 1),
          make_stretch<Real>(problem, Axis::y, electric, layout.ny + 1),
          make_stretch<Real>(problem, Axis::z, electric, static_cast<int>(layout.row))};
}

int n_rows(const Lattice& lattice, Axis a) {
  return lattice.cells(a) + (lattice.periodic[static_cast<std::size_t>(index_of(a))] ? 0 : 1);
}

/// Rows along an axis in groups: the nodes of a Moebius layer together, those on and next to a one_way wall
/// together, all others alone.
std::vector<int> group_rows(const Problem& problem, Axis axis) {
  const int n = problem.lattice.cells(axis), rows = n_rows(problem.lattice, axis);
  const auto cells = [&](bool high) {
    const Face& face = problem.face(side_of(axis, high));
    return face.kind == FaceKind::moebius ? face.cells() : 0;
  };
  const auto is_one_way = [&](bool high) {
    return problem.face(side_of(axis, high)).kind == FaceKind::one_way;
  };
  const int lo_end = cells(false) + 1, hi_begin = n - cells(true);
  std::vector<int> begin{0};
  for (int index = 1; index < rows; ++index) {
    const bool first_of_lo = index == 1 && !is_one_way(false);
    const bool between = index > 1 && index >= lo_end && index <= hi_begin && index < n;
    const bool on_hi = index == n && n > 1 && !is_one_way(true);
    if (first_of_lo || between || on_hi) begin.push_back(index);
  }
  begin.push_back(rows);
  return begin;
}

std::vector<int> make_column_slots(const Problem& problem, Axis axis) {
  const int n = problem.lattice.cells(axis);
  std::vector<int> slots(static_cast<std::size_t>(n) + 1, -1);
  int next = 0;
  for (const bool high : {false, true}) {
    const Face& face = problem.face(side_of(axis, high));
    if (face.kind != FaceKind::moebius) continue;
    const int cells = face.cells();
    for (int d = 0; d < cells; ++d) slots[static_cast<std::size_t>(high ? n - cells + d : 1 + d)] = next++;
  }
  return slots;
}

const Problem& checked(const Problem& problem) {
  check_moebius_faces(problem);
  return problem;
}

}  // namespace

template <class Real>
Marcher<Real>::Marcher(const Problem& problem, int threads, VectorCode code)
    : problem_(checked(problem)),
      layout_(make_row_layout(problem.lattice, sizeof(Real))),
      threads_(threads),
      kernels_(row_kernels<Real>(code)),
      fields_(layout_),
      e_media_(problem, layout_, true, threads),
      h_media_(problem, layout_, false, threads),
      e_stretch_(make_stretches<Real>(problem, layout_, true)),
      h_stretch_(make_stretches<Real>(problem, layout_, false)),
      column_slot_{make_column_slots(problem, Axis::x), make_column_slots(problem, Axis::y)},
      e_memory_(layout_, layer_sizes(problem, LayerPart::cfs_e, layout_, sizeof(Real))),
      h_memory_(layout_, layer_sizes(problem, LayerPart::h, layout_, sizeof(Real))),
      column_memory_(layout_, layer_sizes(problem, LayerPart::moebius_e, layout_, sizeof(Real))),
      one_way_(problem_, layout_, e_media_, h_media_),
      dipoles_(problem, e_media_, h_media_),
      rows_{group_rows(problem, Axis::x), group_rows(problem, Axis::y),
            rows_per_band(static_cast<std::size_t>(layout_.row) * sizeof(Real))},
      slabs_(deal_groups(rows_.i_begin, threads)),
      choice_(TileShape{}),
      tiles_(rows_, {problem.lattice.periodic[0], problem.lattice.periodic[1]}, threads) {
  for (Side side : all_sides)
    columns_[static_cast<std::size_t>(index_of(side))] = MoebiusColumns<Real>(problem_, side, layout_);
  make_z_parts();
  use(problem_.schedule, problem_.tiles);
  if (problem_.plane_wave) surface_ = std::make_unique<TotalFieldSurface<Real>>(problem_, e_media_, h_media_);
  make_places();
  make_extras();
#pragma omp parallel num_threads(threads_)
  {
    // The thread that works on a plane is the first to touch it. Rows past the last moving one belong to the
    // last.
    const auto t = static_cast<std::size_t>(omp_get_thread_num());
    const auto plane = [&](std::size_t slab) {
      return rows_.i_begin[static_cast<std::size_t>(slabs_[slab])];
    };
    const int lo = plane(t), hi = t + 1 == static_cast<std::size_t>(threads_) ? layout_.nx + 1 : plane(t + 1);
    fields_.zero_planes(lo, hi);
    e_memory_.zero_planes(lo, hi, e_stretch_[0].slot);
    h_memory_.zero_planes(lo, hi, h_stretch_[0].slot);
    column_memory_.zero_planes(lo, hi, column_slot_[0]);
  }
}

template <class Real>
std::size_t Marcher<Real>::layer_bytes() const {
  std::size_t sum = 0;
  for (const LayerPart part : {LayerPart::cfs_e, LayerPart::h, LayerPart::moebius_e})
    sum += LayerMemory<Real>::bytes(layout_, layer_sizes(problem_, part, layout_, sizeof(Real)));
  return sum + OneWayWalls<Real>::bytes(problem_, layout_);
}

template <class Real>
std::vector<std::span<Real>> Marcher<Real>::state() {
  std::vector<std::span<Real>> all;
  for (Component c : all_components) all.push_back(fields_.values(c));
  for (LayerMemory<Real>* memory : {&e_memory_, &h_memory_, &column_memory_})
    for (const std::span<Real> part : memory->values()) all.push_back(part);
  one_way_.append_state(all);
  return all;
}

/// Tangential H on the far side of a magnetic wall: the mirror image with its sign turned.
template <class Real>
const Real* Marcher<Real>::mirrored(Component c, int i, int j, Real* scratch) const {
  const Real* row = fields_.row(c, i, j);
  for (std::ptrdiff_t k = 0; k < layout_.row; ++k) scratch[k] = -row[k];
  return scratch;
}

template <class Real>
void Marcher<Real>::use(Schedule schedule, const std::optional<TileShape>& tiles) {
  const bool untiled = schedule == Schedule::tiles && !TileSweep::is_possible(problem_.lattice);
  schedule_ = untiled ? Schedule::fused : schedule;
  if (schedule_ == Schedule::tiles && !tiles)
    choice_ = TileChoice(rows_, 6 * static_cast<std::size_t>(layout_.row) * sizeof(Real), threads_);
  else
    choice_ = TileChoice(tiles.value_or(TileShape{}));
}

template <class Real>
void Marcher<Real>::attach(Captures<Real>* captures) {
  captures_ = captures;
  make_extras();
}

template <class Real>
void Marcher<Real>::make_places() {
  for (const bool high : {false, true}) {
    const Side side = side_of(Axis::z, high);
    z_wall_is_electric_[high ? 1 : 0] = wall_is_electric(problem_, side);
    z_walls_reach_beyond_ =
        z_walls_reach_beyond_ || kind(side) == FaceKind::magnetic_wall || kind(side) == FaceKind::periodic;
  }
  for (const bool electric : {true, false}) {
    const auto& stretch = electric ? e_stretch_ : h_stretch_;
    for (const Axis axis : {Axis::x, Axis::y}) {
      const auto a = static_cast<std::size_t>(index_of(axis));
      const int n = problem_.lattice.cells(axis);
      const bool joined = problem_.lattice.periodic[a];
      // Beyond an electric wall there is no neighbour; the row itself stands in, since nothing that reads it
      // moves.
      const auto neighbour = [&](int index) {
        if (electric) return index > 0 ? index - 1 : joined ? n - 1 : 0;
        return index < n - 1 ? index + 1 : index == n - 1 && joined ? 0 : n;
      };
      std::vector<Place>& places = places_[electric ? 0 : 1][a];
      for (int index = 0; index <= n; ++index) {
        const auto at = static_cast<std::size_t>(index);
        Place place;
        place.beside = (neighbour(index) - index) * (axis == Axis::x ? layout_.plane : layout_.row);
        place.inv = stretch[a].inv[at];
        place.slot = stretch[a].slot[at];
        if (place.slot >= 0) {
          place.b = stretch[a].b[at];
          place.c = stretch[a].c[at];
          place.late = stretch[a].late[at] != 0;
        }
        // Mirrored neighbours of magnetic walls are put into the task itself, and no row may inherit them.
        place.follows = index > 1 && index < n && place.slot < 0 && places.back().slot < 0 &&
                        place.beside == places.back().beside;
        places.push_back(place);
      }
    }
  }
  const auto n_rows_y = static_cast<std::size_t>(rows_.j_begin.back());
  j_run_end_.assign(n_rows_y, 0);
  j_group_end_.assign(n_rows_y, 0);
  for (int b = rows_.n_j(); b-- > 0;) {
    const int begin = rows_.j_begin[static_cast<std::size_t>(b)],
              end = rows_.j_begin[static_cast<std::size_t>(b) + 1];
    const auto at = static_cast<std::size_t>(begin);
    j_group_end_[at] = end;
    const bool single = end - begin == 1 && column_slot_[1][at] < 0;
    const bool goes_on = single && end < rows_.j_begin.back() && j_run_end_[at + 1] > end;
    j_run_end_[at] = !single ? begin : goes_on ? j_run_end_[at + 1] : end;
  }
}

template <class Real>
void Marcher<Real>::make_extras() {
  for (const bool electric : {true, false}) {
    std::vector<unsigned char>& extras = extras_[electric ? 0 : 1];
    extras.assign(static_cast<std::size_t>(layout_.nx + 1) * static_cast<std::size_t>(layout_.ny + 1), 0);
    std::size_t row = 0;
    for (int i = 0; i <= layout_.nx; ++i) {
      for (int j = 0; j <= layout_.ny; ++j, ++row) {
        unsigned extra = 0;
        if (surface_ && (electric ? surface_->touches_e(i, j) : surface_->touches_h(i, j)))
          extra |= on_surface;
        if (dipoles_.touches(i, j)) extra |= has_dipole;
        if (captures_ && captures_->touches(electric, i, j)) extra |= is_captured;
        const auto magnetic_at = [&](Axis a, int index, int n) {
          return (index == 0 && kind(side_of(a, false)) == FaceKind::magnetic_wall) ||
                 (index == n && kind(side_of(a, true)) == FaceKind::magnetic_wall);
        };
        if (electric && (magnetic_at(Axis::x, i, layout_.nx) || magnetic_at(Axis::y, j, layout_.ny)))
          extra |= has_mirror;
        extras[row] = static_cast<unsigned char>(extra);
      }
    }
  }
}

/// All of the task that depends on the row alone. Whatever else a task may hold is left as it is.
template <class Real>
void Marcher<Real>::fill_task(int i, int j, bool electric, RowTask<Real>& t) {
  const Place& x = places_[electric ? 0 : 1][0][static_cast<std::size_t>(i)];
  const Place& y = places_[electric ? 0 : 1][1][static_cast<std::size_t>(j)];
  const std::ptrdiff_t here = layout_.at(i, j);
  for (std::size_t c = 0; c < 3; ++c) {
    Real* const own = fields_.first(all_components[electric ? c : c + 3]);
    const Real* const other = fields_.first(all_components[electric ? c + 3 : c]) + here;
    t.own[c] = own + here;
    t.other[c] = other;
    t.beside_x[c] = other + x.beside;
    t.beside_y[c] = other + y.beside;
  }
  t.inv_x = x.inv;
  t.inv_y = y.inv;
  t.inv_z = (electric ? e_stretch_ : h_stretch_)[2].inv.data();
  t.psi_ahead = 2 * layout_.row;
  auto& memory = electric ? e_memory_ : h_memory_;
  if (x.slot >= 0) {
    t.x_b = x.b;
    t.x_c = x.c;
    t.x_late = x.late;
    t.x_psi_first = memory.x(x.slot, j, 0);
    t.x_psi_second = memory.x(x.slot, j, 1);
  }
  if (y.slot >= 0) {
    t.y_b = y.b;
    t.y_c = y.c;
    t.y_late = y.late;
    t.y_psi_first = memory.y(y.slot, i, 0);
    t.y_psi_second = memory.y(y.slot, i, 1);
  }
  const RowMedia<Real>& media = (electric ? e_media_ : h_media_).row(i, j);
  t.spans = media.spans.data();
  t.n_spans = static_cast<int>(media.spans.size());
}

/// From the task of row (i, j - 1) to that of row (i, j): the same as filling it anew, in less time.
template <class Real>
void Marcher<Real>::step_task(int i, int j, bool electric, RowTask<Real>& t) {
  const Place& y = places_[electric ? 0 : 1][1][static_cast<std::size_t>(j)];
  if (!y.follows) {
    t = RowTask<Real>();
    fill_task(i, j, electric, t);
    return;
  }
  const std::ptrdiff_t row = layout_.row;
  for (std::size_t c = 0; c < 3; ++c) {
    t.own[c] += row;
    t.other[c] += row;
    t.beside_x[c] += row;
    t.beside_y[c] += row;
  }
  t.inv_y = y.inv;
  if (t.x_psi_first) {
    t.x_psi_first += 2 * row;
    t.x_psi_second += 2 * row;
  }
  const RowMedia<Real>& media = (electric ? e_media_ : h_media_).row(i, j);
  t.spans = media.spans.data();
  t.n_spans = static_cast<int>(media.spans.size());
}

/// The parts of rows inside z layers, ready but for what differs from row to row.
template <class Real>
void Marcher<Real>::make_z_parts() {
  for (const bool electric : {true, false}) {
    for (const bool high : {false, true}) {
      const Side side = side_of(Axis::z, high);
      const ZWindow window = z_window(problem_, side, electric, layout_, sizeof(Real));
      if (window.length == 0) continue;
      ZPart part;
      part.length = window.length;
      if (electric && kind(side) == FaceKind::moebius) {
        part.moebius = columns(Axis::z, high).z_task();
        part.moebius.ahead = column_memory_.z_values();
        part.is_moebius_e = true;
      } else {
        const Stretch<Real>& stretch = (electric ? e_stretch_ : h_stretch_)[2];
        part.layer.begin = window.begin;
        part.layer.n = window.length;
        part.layer.b = stretch.b.data() + window.begin;
        part.layer.c = stretch.c.data() + window.begin;
        part.layer.ahead = (electric ? e_memory_ : h_memory_).z_values();
        part.kernel = electric                          ? kernels_.z_layer_e
                      : kind(side) == FaceKind::moebius ? kernels_.z_layer_h_late
                                                        : kernels_.z_layer_h;
      }
      z_parts_[electric ? 0 : 1].push_back(part);
    }
  }
}

template <class Real>
void Marcher<Real>::add_z_layers(const RowTask<Real>& t, const RowMedia<Real>& media, int i, int j,
                                 bool electric) {
  const Real* gain = media.z_layer_gain.data();
  if (media.z_layer_gain.empty()) return;
  Real* psi = (electric ? e_memory_ : h_memory_).z(i, j);
  Real* column_memory = column_memory_.z(i, j);
  for (const ZPart& part : z_parts_[electric ? 0 : 1]) {
    const int n = part.length;
    if (part.is_moebius_e) {
      ZMoebiusTask<Real> z = part.moebius;
      z.gain_x = gain;
      z.gain_y = gain + n;
      z.memory = column_memory;
      kernels_.z_moebius_e(t, z);
      column_memory += 4 * n;
    } else {
      ZLayerTask<Real> z = part.layer;
      z.gain_x = gain;
      z.gain_y = gain + n;
      z.psi_x = psi;
      z.psi_y = psi + n;
      part.kernel(t, z);
      psi += 2 * n;
    }
    gain += 2 * n;
  }
}

/// At k = 0 and nz the kernel saw zero beyond the wall. Adds what a magnetic wall or the periodic image has
/// there.
template <class Real>
void Marcher<Real>::add_z_walls(const RowTask<Real>& t, const RowMedia<Real>& media) {
  const int nz = layout_.nz;
  const FaceKind lo = kind(Side::z_lo), hi = kind(Side::z_hi);
  const auto add = [&](int k, Real hx_beyond, Real hy_beyond, Real sign) {
    const Real inv = t.inv_z[k];
    t.own[0][k] += sign * static_cast<Real>(media.at(0, k).gain) * inv * hy_beyond;
    t.own[1][k] -= sign * static_cast<Real>(media.at(1, k).gain) * inv * hx_beyond;
  };
  if (lo == FaceKind::magnetic_wall) add(0, -t.other[0][0], -t.other[1][0], Real(1));
  if (hi == FaceKind::magnetic_wall) add(nz, -t.other[0][nz - 1], -t.other[1][nz - 1], Real(-1));
  if (lo == FaceKind::periodic) {
    add(0, t.other[0][nz - 1], t.other[1][nz - 1], Real(1));
  }
}

/// The last thing before the recorders: tangential E on electric z walls is zero, and on a joined side the
/// last node is the first one.
template <class Real>
void Marcher<Real>::hold_z_walls(const RowTask<Real>& t) {
  const int nz = layout_.nz;
  if (z_wall_is_electric_[0]) t.own[0][0] = t.own[1][0] = Real(0);
  if (z_wall_is_electric_[1]) t.own[0][nz] = t.own[1][nz] = Real(0);
  if (kind(Side::z_lo) == FaceKind::periodic) {
    t.own[0][nz] = t.own[0][0];
    t.own[1][nz] = t.own[1][0];
  }
}

/// One set of columns: across x at row j = across, or across y at plane i = across.
template <class Real>
void Marcher<Real>::solve_columns(Axis axis, bool high, int across, Real* difference,
                                  std::ptrdiff_t difference_step) {
  const MoebiusColumns<Real>& layer = columns(axis, high);
  const bool along_x = axis == Axis::x;
  const int node = layer.first_node(), step = layer.step();
  const std::ptrdiff_t stride = along_x ? layout_.plane : layout_.row;
  const int slot = column_slot_[along_x ? 0 : 1][static_cast<std::size_t>(node)];
  ColumnTask<Real> task;
  task.cells = layer.cells();
  task.row = layout_.row;
  task.numbers = layer.numbers();
  task.h_step = step * stride;
  task.h_minus = stride;
  task.memory_step = step * (along_x ? column_memory_.x_stride() : column_memory_.y_stride());
  task.difference_step = step * difference_step;
  // Across x the next row's columns follow soon; across y the rest of a plane lies between.
  constexpr std::ptrdiff_t soon = cache_line_bytes / sizeof(Real);
  task.h_ahead = along_x ? layout_.row : soon;
  task.memory_ahead =
      along_x ? column_memory_.x(slot, across + 1, 0) - column_memory_.x(slot, across, 0) : soon;
  for (int c = 0; c < 2; ++c) {
    // E of the next axis changes with H of the one after, and the other way round.
    const Axis h = c == 0 ? next(next(axis)) : next(axis);
    task.h[c] = along_x ? fields_.row(magnetic(h), node, across) : fields_.row(magnetic(h), across, node);
    task.memory[c] = along_x ? column_memory_.x(slot, across, 2 * c) : column_memory_.y(slot, across, 2 * c);
    task.difference[c] = difference + (node - layer.nodes().begin) * difference_step + c * layout_.row;
  }
  kernels_.moebius_columns(task);
}

template <class Real>
void Marcher<Real>::advance_e(const RowBlock& block, long step, const Ahead& ahead) {
  const int slot = static_cast<int>(step - block_.first);
  const bool single = block.i1 - block.i0 == 1 && column_slot_[0][static_cast<std::size_t>(block.i0)] < 0;
  for (int j = block.j0; j < block.j1;) {
    const int run_end = std::min(j_run_end_[static_cast<std::size_t>(j)], block.j1);
    if (run_end == j) {
      const int group_end = j_group_end_[static_cast<std::size_t>(j)];
      advance_e_group({block.i0, block.i1, j, group_end}, slot, ahead);
      j = group_end;
    } else if (single) {
      RowTask<Real> t;
      fill_task(block.i0, j, true, t);
      set_ahead(ahead, t);
      for (const int first = j; j < run_end; ++j) {
        if (j > first) {
          step_task(block.i0, j, true, t);
          if (t.ahead == 0) set_ahead(ahead, t);
        }
        advance_e_task(block.i0, j, run_end, slot, t);
      }
    } else {
      advance_e_group({block.i0, block.i1, j, run_end}, slot, ahead);
      j = run_end;
    }
  }
}

/// Rows of a group along x and one along y, or single ones along y.
template <class Real>
void Marcher<Real>::advance_e_group(const RowBlock& block, int slot, const Ahead& ahead) {
  // The row next to a one_way wall comes before the row on it.
  const auto in_order = [&](Axis axis, int index, int begin, int end) {
    return begin == 0 && end > 1 && kind(side_of(axis, false)) == FaceKind::one_way ? begin + end - 1 - index
                                                                                    : index;
  };
  // A block of more than one plane or row is mostly a layer's; one of a single node may be.
  const auto in_layer = [&](Axis axis, int index) {
    const std::size_t a = axis == Axis::x ? 0 : 1;
    return column_slot_[a][static_cast<std::size_t>(index)] >= 0;
  };
  const bool x = in_layer(Axis::x, block.i0), y = in_layer(Axis::y, block.j0);
  if (!x && !y) {
    for (int j = block.j0; j < block.j1; ++j)
      for (int i = block.i0; i < block.i1; ++i)
        advance_e_row(in_order(Axis::x, i, block.i0, block.i1), in_order(Axis::y, j, block.j0, block.j1), 0,
                      slot, {}, ahead);
    return;
  }
  const std::ptrdiff_t pair = 2 * layout_.row;
  const int n_i = block.i1 - block.i0, n_j = y ? block.j1 - block.j0 : 1;
  thread_local AlignedArray<Real> scratch;  // x pairs of one j, then y pairs of all i and j
  const auto needed = static_cast<std::size_t>(pair * (n_i + n_i * n_j));
  if (scratch.size() < needed) scratch = AlignedArray<Real>(needed);
  Real* const x_pairs = scratch.data();
  Real* const y_pairs = x_pairs + n_i * pair;
  const auto on_high_side = [&](Axis axis, int index) {
    return columns(axis, true).cells() > 0 && index >= columns(axis, true).nodes().begin;
  };
  if (y)
    for (int i = block.i0; i < block.i1; ++i)
      solve_columns(Axis::y, on_high_side(Axis::y, block.j0), i, y_pairs + (i - block.i0) * n_j * pair, pair);
  for (int j_turn = block.j0; j_turn < block.j1; ++j_turn) {
    const int j = y ? in_order(Axis::y, j_turn, block.j0, block.j1) : j_turn;
    if (x) solve_columns(Axis::x, on_high_side(Axis::x, block.i0), j, x_pairs, pair);
    for (int i_turn = block.i0; i_turn < block.i1; ++i_turn) {
      const int i = in_order(Axis::x, i_turn, block.i0, block.i1);
      advance_e_row(i, j, 0, slot,
                    {x ? x_pairs + (i - block.i0) * pair : nullptr,
                     y ? y_pairs + ((i - block.i0) * n_j + (j - block.j0)) * pair : nullptr},
                    ahead);
    }
  }
}

/// Tangential H on the far side of magnetic walls.
template <class Real>
void Marcher<Real>::mirror_h(int i, int j, RowTask<Real>& t) {
  thread_local AlignedArray<Real> scratch;  // Hy, Hz beyond an x wall, Hx, Hz beyond a y wall
  const auto mirror = [&](const Real** beside, std::size_t component, std::size_t slot) {
    const auto row = static_cast<std::size_t>(layout_.row);
    if (scratch.size() < 4 * row) scratch = AlignedArray<Real>(4 * row);
    beside[component] = mirrored(all_components[component + 3], i, j, scratch.data() + slot * row);
  };
  if (i == 0 && kind(Side::x_lo) == FaceKind::magnetic_wall) {
    mirror(t.beside_x, 1, 0);
    mirror(t.beside_x, 2, 1);
  }
  if (j == 0 && kind(Side::y_lo) == FaceKind::magnetic_wall) {
    mirror(t.beside_y, 0, 2);
    mirror(t.beside_y, 2, 3);
  }
  // At the high wall the row itself holds no tangential H: it is the far side of the wall.
  if (i == layout_.nx && kind(Side::x_hi) == FaceKind::magnetic_wall) {
    for (std::size_t n = 1; n < 3; ++n) {
      Real* beyond = fields_.row(all_components[n + 3], i, j);
      mirrored(all_components[n + 3], i - 1, j, beyond);
    }
  }
  if (j == layout_.ny && kind(Side::y_hi) == FaceKind::magnetic_wall) {
    for (const std::size_t n : {std::size_t{0}, std::size_t{2}}) {
      Real* beyond = fields_.row(all_components[n + 3], i, j);
      mirrored(all_components[n + 3], i, j - 1, beyond);
    }
  }
}

template <class Real>
void Marcher<Real>::set_ahead(const Ahead& ahead, RowTask<Real>& t) const {
  t.ahead = layout_.at(ahead.planes, ahead.rows);
  t.ahead_begin = layout_.row * ahead.part / ahead.parts;
  t.ahead_end = layout_.row * (ahead.part + 1) / ahead.parts;
}

template <class Real>
void Marcher<Real>::advance_e_row(int i, int j, int j_end, int slot, const Given& given, const Ahead& ahead) {
  RowTask<Real> t;
  fill_task(i, j, true, t);
  set_ahead(ahead, t);
  if (given.x) {
    t.x_given_first = given.x;
    t.x_given_second = given.x + layout_.row;
  }
  if (given.y) {
    t.y_given_first = given.y;
    t.y_given_second = given.y + layout_.row;
  }
  advance_e_task(i, j, j_end, slot, t);
}

template <class Real>
void Marcher<Real>::advance_e_task(int i, int j, int j_end, int slot, RowTask<Real>& t) {
  const unsigned extra = extras_[0][static_cast<std::size_t>(i) * static_cast<std::size_t>(layout_.ny + 1) +
                                    static_cast<std::size_t>(j)];
  if (extra & has_mirror) mirror_h(i, j, t);
  const RowMedia<Real>& media = e_media_.row(i, j);
  kernels_.advance_e(t);
  add_z_layers(t, media, i, j, true);
  if (z_walls_reach_beyond_) add_z_walls(t, media);
  if ((extra & on_surface) && surface_->is_active(slot))
    surface_->add(true, i, j, slot, surface_lines(true, i, j, j_end, slot), t.own);
  if (extra & has_dipole) dipoles_.add_e(i, j, slot, t.own);
  hold_z_walls(t);
  if (!one_way_.empty()) one_way_.finish_row(i, j, block_.first + slot, fields_);
  if (extra & is_captured) captures_->take(true, i, j, slot, fields_);
}

/// The rows that follow in the plane are sampled together with the first of them.
template <class Real>
const typename TotalFieldSurface<Real>::ZFaceLines& Marcher<Real>::surface_lines(bool electric, int i, int j,
                                                                                 int j_end, int slot) {
  struct Kept {
    const void* owner = nullptr;
    long step = -1;
    bool electric = false;
    int i = -1;
    typename TotalFieldSurface<Real>::ZFaceLines lines;
  };
  thread_local Kept kept;
  const bool fits = kept.owner == this && kept.step == block_.first + slot && kept.electric == electric &&
                    kept.i == i && kept.lines.j_begin <= j && j < kept.lines.j_end;
  if (!fits || j == kept.lines.j_begin) {
    surface_->sample_z_faces(electric, i, j, std::max(j_end, j + 1), slot, kept.lines);
    kept.owner = this;
    kept.step = block_.first + slot;
    kept.electric = electric;
    kept.i = i;
  }
  return kept.lines;
}

template <class Real>
void Marcher<Real>::advance_h(const RowBlock& block, long step) {
  const int slot = static_cast<int>(step - block_.first);
  for (int i = block.i0; i < block.i1; ++i) {
    const unsigned char* extras =
        extras_[1].data() + static_cast<std::size_t>(i) * static_cast<std::size_t>(layout_.ny + 1);
    if (block.j0 >= block.j1) continue;
    RowTask<Real> t;
    fill_task(i, block.j0, false, t);
    for (int j = block.j0; j < block.j1; ++j) {
      if (j > block.j0) step_task(i, j, false, t);
      kernels_.advance_h(t);
      add_z_layers(t, h_media_.row(i, j), i, j, false);
      if ((extras[j] & on_surface) && surface_->is_active(slot))
        surface_->add(false, i, j, slot, surface_lines(false, i, j, block.j1, slot), t.own);
      if (extras[j] & has_dipole) dipoles_.add_h(i, j, slot, t.own);
      if (extras[j] & is_captured) captures_->take(false, i, j, slot, fields_);
    }
  }
}

template <class Real>
void Marcher<Real>::advance(long n, const std::vector<Recorder*>& recorders) {
  std::exception_ptr failure;  // an exception must not leave the parallel region
  bool failed = false;
  const long last = step_ + n;
#pragma omp parallel num_threads(threads_)
  {
    const FlushDenormals flush;
    const int thread = omp_get_thread_num();
    const PinnedThread pinned(thread, threads_, problem_.pin_threads);
    while (!failed && step_ < last) {
#pragma omp single
      {
        // Blocks of equal length rather than long ones and a short rest.
        const TileShape& shape = choice_.next();
        const long most = block_steps(), left = last - step_, blocks = (left + most - 1) / most;
        block_ = {step_ + 1, static_cast<int>((left + blocks - 1) / blocks)};
        dipoles_.prepare(block_);
        if (captures_) captures_->begin_block(block_.n);
        for (Recorder* recorder : recorders) recorder->before_block(block_);
        if (schedule() == Schedule::tiles) tiles_.prepare(shape, block_.first, block_.n);
      }
      if (surface_) surface_->prepare(block_);
#pragma omp barrier
      const double start_s = omp_get_wtime();
      const Schedule now = schedule();
      if (now == Schedule::tiles)
        tiles_.sweep(*this);
      else
        for (long s = block_.first; s < block_.end(); ++s) sweep(now, rows_, slabs_, thread, s, *this);
#pragma omp barrier
      const double swept_s = omp_get_wtime() - start_s;
      for (Recorder* recorder : recorders) recorder->after_block_shared(thread, threads_);
#pragma omp barrier
#pragma omp single
      {
        step_ = block_.end() - 1;
        // A block cut short tells nothing of its shape.
        if (4 * block_.n >= 3 * block_steps()) choice_.took(block_.n, swept_s);
        try {
          for (Recorder* recorder : recorders) recorder->after_block();
        } catch (...) {
          failure = std::current_exception();
          failed = true;
        }
      }
    }
  }
  if (failure) std::rethrow_exception(failure);
}

template <class Real>
double Marcher<Real>::clear_energy_j() const {
  const Lattice& lattice = problem_.lattice;
  const double c_dt = c0_m_per_s * lattice.dt_s;
  // Weight of an index along an axis: the length that belongs to it, halved on the rim of the clear volume.
  const auto weights = [&](Component c, Axis a) {
    std::vector<double> w(static_cast<std::size_t>(lattice.cells(a)) + 1, 0.0);
    const IndexRange clear = lattice.clear(c, a);
    for (int n = clear.begin; n < clear.end; ++n) {
      const bool rim = !is_half(c, a) && (n == clear.begin || n + 1 == clear.end);
      w[static_cast<std::size_t>(n)] =
          is_half(c, a) ? lattice.along(a).cell_m(n) : lattice.along(a).dual_m(n) * (rim ? 0.5 : 1.0);
    }
    return w;
  };
  double total = 0.0;
  for (Component c : all_components) {
    const std::vector<double> wx = weights(c, Axis::x), wy = weights(c, Axis::y), wz = weights(c, Axis::z);
    const IndexRange x = lattice.clear(c, Axis::x), y = lattice.clear(c, Axis::y),
                     z = lattice.clear(c, Axis::z);
    const int component = index_of(axis_of(c));
    std::vector<double> of_plane(static_cast<std::size_t>(layout_.nx) + 1, 0.0);
#pragma omp parallel for num_threads(threads_) schedule(static)
    for (int i = x.begin; i < x.end; ++i) {
      double plane = 0.0;
      for (int j = y.begin; j < y.end; ++j) {
        const Real* row = fields_.row(c, i, j);
        double sum = 0.0;
        for (const MediaSpan<Real>& span : (is_electric(c) ? e_media_ : h_media_).row(i, j).spans) {
          const int length = span.end - span.begin;
          const int from = std::max(span.begin, z.begin), to = std::min(span.end, z.end);
          // eps_r (or mu_r) from the update itself.
          const auto relative = [&](double decay, double gain) {
            return gain == 0.0 ? 0.0 : 0.5 * c_dt * (1.0 + decay) / gain;
          };
          double part = 0.0;
          if (!span.mixed) {
            const double* w = wz.data();
#pragma omp simd reduction(+ : part)
            for (int k = from; k < to; ++k)
              part += static_cast<double>(row[k]) * static_cast<double>(row[k]) * w[k];
            part *= relative(static_cast<double>(span.decay[component]),
                             static_cast<double>(span.gain[component]));
          } else {
            for (int k = from; k < to; ++k) {
              const Real* pair = span.mixed + 2 * component * length + (k - span.begin);
              const double value = static_cast<double>(row[k]);
              part += relative(static_cast<double>(pair[0]), static_cast<double>(pair[length])) * value *
                      value * wz[static_cast<std::size_t>(k)];
            }
          }
          sum += part;
        }
        plane += sum * wy[static_cast<std::size_t>(j)];
      }
      of_plane[static_cast<std::size_t>(i)] = plane * wx[static_cast<std::size_t>(i)];
    }
    for (double plane : of_plane) total += plane;  // in order, whatever the threads
  }
  return 0.5 * eps0_f_per_m * total;
}

template <class Real>
std::string Marcher<Real>::find_not_finite() const {
  for (Component c : all_components)
    for (int i = 0; i <= layout_.nx; ++i)
      for (int j = 0; j <= layout_.ny; ++j)
        for (int k = 0; k <= layout_.nz; ++k)
          if (!std::isfinite(fields_.row(c, i, j)[k]))
            return std::string(name_of(c)) + " in cell (" + std::to_string(i) + ", " + std::to_string(j) +
                   ", " + std::to_string(k) + ")";
  return {};
}

template class Marcher<float>;
template class Marcher<double>;

}  // namespace wanewall
