#include "solver/marcher.hpp"

#include <omp.h>

#include <algorithm>
#include <exception>

#include "solver/flush_denormals.hpp"
#include "solver/pinned_thread.hpp"

namespace wanewall {

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
      bool is_sampled = false;
      fill_task(block.i0, j, true, t);
      set_ahead(ahead, t);
      for (const int first = j; j < run_end; ++j) {
        if (j > first) {
          step_task(block.i0, j, true, t);
          if (t.ahead == 0) set_ahead(ahead, t);
        }
        advance_e_task(block.i0, j, run_end, slot, t, is_sampled);
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
        advance_e_row(in_order(Axis::x, i, block.i0, block.i1), in_order(Axis::y, j, block.j0, block.j1),
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
      advance_e_row(i, j, slot,
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
void Marcher<Real>::advance_e_row(int i, int j, int slot, const Given& given, const Ahead& ahead) {
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
  bool is_sampled = false;
  advance_e_task(i, j, j + 1, slot, t, is_sampled);
}

template <class Real>
void Marcher<Real>::advance_e_task(int i, int j, int j_end, int slot, RowTask<Real>& t, bool& is_sampled) {
  const unsigned extra = extras_[0][static_cast<std::size_t>(i) * static_cast<std::size_t>(layout_.ny + 1) +
                                    static_cast<std::size_t>(j)];
  if (extra & has_mirror) mirror_h(i, j, t);
  const RowMedia<Real>& media = e_media_.row(i, j);
  kernels_.advance_e(t);
  add_z_layers(t, media, i, j, true);
  if (z_walls_reach_beyond_) add_z_walls(t, media);
  if ((extra & on_surface) && surface_->is_active(slot))
    surface_->add(true, i, j, slot, surface_lines(true, i, j, j_end, slot, is_sampled), t.own);
  if (extra & has_dipole) dipoles_.add_e(i, j, slot, t.own);
  hold_z_walls(t);
  if (!one_way_.empty()) one_way_.finish_row(i, j, block_.first + slot, fields_);
  if (extra & is_captured) captures_->take(true, i, j, slot, fields_);
}

/// The rows that follow in the run are sampled together with the first that lies on the surface; `is_sampled`
/// is the run's, which nothing interrupts in its thread.
template <class Real>
const typename TotalFieldSurface<Real>::ZFaceLines& Marcher<Real>::surface_lines(bool electric, int i, int j,
                                                                                 int j_end, int slot,
                                                                                 bool& is_sampled) const {
  thread_local typename TotalFieldSurface<Real>::ZFaceLines lines;
  if (!is_sampled) surface_->sample_z_faces(electric, i, j, j_end, slot, lines);
  is_sampled = true;
  return lines;
}

template <class Real>
void Marcher<Real>::advance_h(const RowBlock& block, long step) {
  const int slot = static_cast<int>(step - block_.first);
  for (int i = block.i0; i < block.i1; ++i) {
    const unsigned char* extras =
        extras_[1].data() + static_cast<std::size_t>(i) * static_cast<std::size_t>(layout_.ny + 1);
    if (block.j0 >= block.j1) continue;
    RowTask<Real> t;
    bool is_sampled = false;
    fill_task(i, block.j0, false, t);
    for (int j = block.j0; j < block.j1; ++j) {
      if (j > block.j0) step_task(i, j, false, t);
      kernels_.advance_h(t);
      add_z_layers(t, h_media_.row(i, j), i, j, false);
      if ((extras[j] & on_surface) && surface_->is_active(slot))
        surface_->add(false, i, j, slot, surface_lines(false, i, j, block.j1, slot, is_sampled), t.own);
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

template class Marcher<float>;
template class Marcher<double>;

}  // namespace wanewall
