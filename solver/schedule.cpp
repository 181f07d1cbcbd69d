#include "solver/schedule.hpp"

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

/// H follows E one row and one plane behind, while the rows it needs are still in cache. The last plane of a
/// slab waits for the next slab's first.
void fused_sweep(const RowExtent& rows, int lo, int hi, RowWork& work) {
  for (int i = lo; i < hi; ++i) {
    for (int j = 0; j <= rows.n_j; ++j) {
      if (j < rows.n_j) work.advance_e(i, j);
      if (i > lo && j > 0) work.advance_h(i - 1, j - 1);
    }
  }
#pragma omp barrier
  if (hi > lo)
    for (int j = 0; j < rows.n_j; ++j) work.advance_h(hi - 1, j);
#pragma omp barrier
}

}  // namespace

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
