#include "solver/schedule.hpp"

#include <algorithm>

namespace wanewall {
namespace {

/// All E, then all H: the reference.
void plain_sweep(const RowExtent& rows, int lo, int hi, RowWork& work) {
  for (int i = lo; i < hi; ++i)
    for (int j = 0; j < rows.n_j; ++j) work.advance_e(i, j);
#pragma omp barrier
  for (int i = lo; i < hi; ++i)
    for (int j = 0; j < rows.n_j; ++j) work.advance_h(i, j);
#pragma omp barrier
}

/// H follows E one row and one plane behind, while the rows it needs are still in cache. Rows are taken in
/// bands of j narrow enough that two planes of a band stay in the cache next to the core. The last plane of a
/// slab waits for the next slab's first.
void fused_sweep(const RowExtent& rows, int lo, int hi, RowWork& work) {
  for (int j_lo = 0; j_lo <= rows.n_j; j_lo += rows.band) {
    const int j_hi = std::min(j_lo + rows.band, rows.n_j + 1);
    for (int i = lo; i < hi; ++i) {
      for (int j = j_lo; j < j_hi; ++j) {
        if (j < rows.n_j) work.advance_e(i, j);
        if (i > lo && j > 0) work.advance_h(i - 1, j - 1);
      }
    }
  }
#pragma omp barrier
  if (hi > lo)
    for (int j = 0; j < rows.n_j; ++j) work.advance_h(hi - 1, j);
#pragma omp barrier
}

}  // namespace

int rows_per_band(std::size_t row_bytes) {
  // Half of the 1 MiB that processors of this decade have next to each core; six fields, two planes.
  constexpr double budget_bytes = 512.0 * 1024.0;
  return std::clamp(static_cast<int>(budget_bytes / (12.0 * static_cast<double>(row_bytes))), 4, 4096);
}

std::vector<int> deal_planes(int n_i, int threads) {
  std::vector<int> begin(static_cast<std::size_t>(threads) + 1);
  for (int t = 0; t <= threads; ++t)
    begin[static_cast<std::size_t>(t)] = static_cast<int>(static_cast<long>(n_i) * t / threads);
  return begin;
}

void sweep(Schedule schedule, const RowExtent& rows, const std::vector<int>& slabs, int thread,
           RowWork& work) {
  const int lo = slabs[static_cast<std::size_t>(thread)], hi = slabs[static_cast<std::size_t>(thread) + 1];
  schedule == Schedule::plain ? plain_sweep(rows, lo, hi, work) : fused_sweep(rows, lo, hi, work);
}

}  // namespace wanewall
