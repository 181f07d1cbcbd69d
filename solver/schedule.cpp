#include "solver/schedule.hpp"

#include <algorithm>

namespace wanewall {
namespace {

RowBlock block_of(const RowGroups& rows, int a, int b) {
  const auto x = static_cast<std::size_t>(a), y = static_cast<std::size_t>(b);
  return {rows.i_begin[x], rows.i_begin[x + 1], rows.j_begin[y], rows.j_begin[y + 1]};
}

/// All E, then all H: the reference.
void plain_sweep(const RowGroups& rows, int lo, int hi, RowWork& work) {
  for (int a = lo; a < hi; ++a)
    for (int b = 0; b < rows.n_j(); ++b) work.advance_e(block_of(rows, a, b));
#pragma omp barrier
  for (int i = rows.i_begin[static_cast<std::size_t>(lo)]; i < rows.i_begin[static_cast<std::size_t>(hi)];
       ++i)
    for (int j = 0; j < rows.j_begin.back(); ++j) work.advance_h(i, j);
#pragma omp barrier
}

/// H follows E one row and one plane behind, while the rows it needs are still in cache. Groups are taken in
/// bands along y narrow enough that two planes of a band stay in the cache next to the core. The last plane
/// of a slab waits for the next slab's first.
void fused_sweep(const RowGroups& rows, int lo, int hi, RowWork& work) {
  const int first = rows.i_begin[static_cast<std::size_t>(lo)];
  const int last = rows.i_begin[static_cast<std::size_t>(hi)] - 1;
  const int n_j = rows.j_begin.back();
  for (int b_lo = 0; b_lo <= rows.n_j(); b_lo += rows.band) {
    const int b_hi = std::min(b_lo + rows.band, rows.n_j() + 1);
    for (int a = lo; a < hi; ++a) {
      for (int b = b_lo; b < b_hi; ++b) {
        // Behind the last group, only the H that waited for it.
        RowBlock block{rows.i_begin[static_cast<std::size_t>(a)],
                       rows.i_begin[static_cast<std::size_t>(a) + 1], n_j, n_j + 1};
        if (b < rows.n_j()) {
          block = block_of(rows, a, b);
          work.advance_e(block);
        }
        for (int j = std::max(block.j0 - 1, 0); j < block.j1 - 1; ++j)
          for (int i = std::max(block.i0 - 1, first); i < block.i1 - 1; ++i) work.advance_h(i, j);
      }
    }
  }
#pragma omp barrier
  if (hi > lo)
    for (int j = 0; j < n_j; ++j) work.advance_h(last, j);
#pragma omp barrier
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

void sweep(Schedule schedule, const RowGroups& rows, const std::vector<int>& slabs, int thread,
           RowWork& work) {
  const int lo = slabs[static_cast<std::size_t>(thread)], hi = slabs[static_cast<std::size_t>(thread) + 1];
  schedule == Schedule::plain ? plain_sweep(rows, lo, hi, work) : fused_sweep(rows, lo, hi, work);
}

}  // namespace wanewall
