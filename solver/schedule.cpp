#include "solver/schedule.hpp"

#include <sched.h>

#include <algorithm>

namespace wanewall {
namespace {

int at(const std::vector<int>& begin, int group) {
  return begin[static_cast<std::size_t>(group)];
}

/// All E, then all H: the reference.
void plain_sweep(const RowGroups& rows, int lo, int hi, long step, RowWork& work) {
  const int n_j = rows.j_begin.back();
  for (int a = lo; a < hi; ++a)
    work.advance_e({at(rows.i_begin, a), at(rows.i_begin, a + 1), 0, n_j}, step, {});
#pragma omp barrier
  work.advance_h({at(rows.i_begin, lo), at(rows.i_begin, hi), 0, n_j}, step);
#pragma omp barrier
}

/// H follows E one row and one plane behind, while the rows it needs are still in cache. Groups are taken in
/// bands along y narrow enough that two planes of a band stay in the cache next to the core. The last plane
/// of a slab waits for the next slab's first.
void fused_sweep(const RowGroups& rows, int lo, int hi, long step, RowWork& work) {
  const int first = at(rows.i_begin, lo), last = at(rows.i_begin, hi) - 1;
  const int n_j = rows.j_begin.back();
  for (int b_lo = 0; b_lo < rows.n_j(); b_lo += rows.band) {
    const int b_hi = std::min(b_lo + rows.band, rows.n_j());
    const int j_lo = at(rows.j_begin, b_lo), j_hi = at(rows.j_begin, b_hi);
    for (int a = lo; a < hi; ++a) {
      const int i_lo = at(rows.i_begin, a), i_hi = at(rows.i_begin, a + 1);
      work.advance_e({i_lo, i_hi, j_lo, j_hi}, step, {});
      work.advance_h(
          {std::max(i_lo - 1, first), i_hi - 1, std::max(j_lo - 1, 0), b_hi == rows.n_j() ? n_j : j_hi - 1},
          step);
    }
  }
#pragma omp barrier
  if (hi > lo) work.advance_h({last, last + 1, 0, n_j}, step);
#pragma omp barrier
}

/// Waits until another thread has come far enough. A waiting thread gives its processor away after a while,
/// since the one it waits for may need it.
void wait_for(const std::atomic<int>& done, int enough) {
  for (int turn = 0; done.load(std::memory_order_acquire) < enough; ++turn) {
    if (turn < 2000)
      __builtin_ia32_pause();
    else
      sched_yield();
  }
}

}  // namespace

int rows_per_band(std::size_t row_bytes) {
  // Half of the 1 MiB that processors of this decade have next to each core; six fields, two planes.
  constexpr double budget_bytes = 512.0 * 1024.0;
  return std::clamp(static_cast<int>(budget_bytes / (12.0 * static_cast<double>(row_bytes))), 4, 4096);
}

std::vector<int> deal_groups(const std::vector<int>& i_begin, int threads) {
  std::vector<int> begin;
  for (int t = 0; t <= threads; ++t) {
    const int plane = static_cast<int>(static_cast<long>(i_begin.back()) * t / threads);
    const auto next = std::lower_bound(i_begin.begin(), i_begin.end(), plane);
    begin.push_back(static_cast<int>(next - i_begin.begin()));
  }
  return begin;
}

void sweep(Schedule schedule, const RowGroups& rows, const std::vector<int>& slabs, int thread, long step,
           RowWork& work) {
  const int lo = slabs[static_cast<std::size_t>(thread)], hi = slabs[static_cast<std::size_t>(thread) + 1];
  schedule == Schedule::plain ? plain_sweep(rows, lo, hi, step, work) : fused_sweep(rows, lo, hi, step, work);
}

bool TileSweep::is_possible(const Lattice& lattice) {
  return !(lattice.periodic[0] && lattice.periodic[1]);
}

TileSweep::TileSweep(const RowGroups& rows, const std::array<bool, 2>& joined, int threads)
    : rows_(rows), joined_(joined), threads_(threads) {}

TileSweep::Range TileSweep::Cuts::e(int tile, int s) const {
  if (joined) return {0, groups};
  const int lo = at[static_cast<std::size_t>(tile)], hi = at[static_cast<std::size_t>(tile) + 1];
  return {std::clamp(lo - s, 0, groups), std::clamp(hi - s, 0, groups)};
}

TileSweep::Range TileSweep::Cuts::h(int tile, int s) const {
  return e(tile, joined ? s : s + 1);
}

/// Cuts as even as groups allow. Beyond the last group lie as many empty ones as there are steps.
TileSweep::Cuts TileSweep::cut(const std::vector<int>& begin, bool joined, int rows_per_tile, int n_steps,
                               int multiple) {
  Cuts cuts;
  cuts.groups = static_cast<int>(begin.size()) - 1;
  cuts.joined = joined;
  if (joined) return cuts;
  const int rows = begin.back() + n_steps;
  int tiles = std::max(1, (rows + rows_per_tile / 2) / rows_per_tile);
  if (tiles > multiple) tiles = (tiles + multiple - 1) / multiple * multiple;
  for (int t = 1; t < tiles; ++t) {
    const int row = static_cast<int>(static_cast<long>(rows) * t / tiles);
    const int group =
        row >= begin.back()
            ? cuts.groups + row - begin.back()
            : static_cast<int>(std::lower_bound(begin.begin(), begin.end(), row) - begin.begin());
    if (group > cuts.at.back()) cuts.at.push_back(group);
  }
  cuts.at.push_back(cuts.groups + n_steps);
  return cuts;
}

TileShape TileSweep::real_shape(const TileShape& shape) const {
  TileShape real = shape;
  if (joined_[0] || shape.x_rows > rows_.i_begin.back()) real.x_rows = rows_.i_begin.back();
  if (joined_[1] || shape.y_rows > rows_.j_begin.back()) real.y_rows = rows_.j_begin.back();
  return real;
}

void TileSweep::prepare(const TileShape& shape, long first_step, int n_steps) {
  moves_along_x_ = joined_[1] || (!joined_[0] && shape.x_rows < shape.y_rows);
  // As many strips as give every thread the same number.
  x_ = cut(rows_.i_begin, joined_[0], shape.x_rows, n_steps, moves_along_x_ ? 1 : threads_);
  y_ = cut(rows_.j_begin, joined_[1], shape.y_rows, n_steps, moves_along_x_ ? threads_ : 1);
  first_step_ = first_step;
  n_steps_ = n_steps;
  width_ = moves_along_x_ ? shape.x_rows : shape.y_rows;
  n_along_ = moves_along_x_ ? x_.n() : y_.n();
  n_strips_ = joined_[0] || joined_[1] ? std::min(n_steps, threads_) : moves_along_x_ ? y_.n() : x_.n();
  if (progress_size_ < n_strips_) {
    progress_ = std::make_unique<Progress[]>(static_cast<std::size_t>(n_strips_));
    progress_size_ = n_strips_;
  }
  for (int p = 0; p < n_strips_; ++p) progress_[static_cast<std::size_t>(p)].done = 0;
  next_strip_ = 0;
}

void TileSweep::sweep(RowWork& work) {
  for (int p = next_strip_++; p < n_strips_; p = next_strip_++) {
    for (int q = 0; q < n_along_; ++q) {
      if (p > 0) wait_for(progress_[static_cast<std::size_t>(p) - 1].done, q + 1);
      const int s_begin = n_steps_ * p / n_strips_, s_end = n_steps_ * (p + 1) / n_strips_;
      if (joined_[0] || joined_[1])
        advance_tile(moves_along_x_ ? q : 0, moves_along_x_ ? 0 : q, s_begin, s_end, work);
      else
        advance_tile(moves_along_x_ ? q : p, moves_along_x_ ? p : q, 0, n_steps_, work);
      progress_[static_cast<std::size_t>(p)].done.store(q + 1, std::memory_order_release);
    }
  }
}

/// H follows E one plane behind.
void TileSweep::advance_tile(int a, int b, int s_begin, int s_end, RowWork& work) const {
  for (int s = s_begin; s < s_end; ++s) {
    const Range ex = x_.e(a, s), hx = x_.h(a, s), ey = y_.e(b, s), hy = y_.h(b, s);
    const long step = first_step_ + s;
    // The next tile's first step wants what lies one tile further, s groups up from here in both axes. Each
    // step fetches its share.
    const Ahead ahead{s + (moves_along_x_ ? width_ : 0), s + (moves_along_x_ ? 0 : width_), s, n_steps_};
    for (int x = std::min(ex.begin, hx.begin + 1); x < std::max(ex.end, hx.end + 1); ++x) {
      if (!ey.empty() && ex.begin <= x && x < ex.end)
        work.advance_e({at(rows_.i_begin, x), at(rows_.i_begin, x + 1), at(rows_.j_begin, ey.begin),
                        at(rows_.j_begin, ey.end)},
                       step, ahead);
      if (!hy.empty() && hx.begin < x && x <= hx.end)
        work.advance_h({at(rows_.i_begin, x - 1), at(rows_.i_begin, x), at(rows_.j_begin, hy.begin),
                        at(rows_.j_begin, hy.end)},
                       step);
    }
  }
}

}  // namespace wanewall
