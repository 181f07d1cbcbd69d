// In which order rows are visited. A schedule knows nothing of what a row does.
//
// What it must keep:  E(i, j) at step s needs H(i, j), H(i-1, j), H(i, j-1) at s - 1/2;
//                     H(i, j) at s + 1/2 needs E(i, j), E(i+1, j), E(i, j+1) at s   (indices wrap on periodic
//                     axes).
// Any order that keeps these gives the same bits, because a row's own arithmetic is fixed.
#pragma once

#include <cstddef>
#include <vector>

#include "solver/problem.hpp"

namespace wanewall {

/// The work of one row. Called from many threads, for different rows at once.
class RowWork {
 public:
  virtual ~RowWork() = default;
  virtual void advance_e(int i, int j) = 0;
  virtual void advance_h(int i, int j) = 0;
};

/// Rows that exist: i < n_i, j < n_j, for E and H alike.
struct RowExtent {
  int n_i = 0;
  int n_j = 0;
  int band = 4096;  ///< rows that the fused sweep takes at a time, see rows_per_band
};

/// Rows of which two planes, all six fields, fill half of a second-level cache of 1 MiB.
int rows_per_band(std::size_t row_bytes);

/// Planes i dealt to threads as slabs of nearly equal size; slab t is [begin[t], begin[t + 1]).
std::vector<int> deal_planes(int n_i, int threads);

/// Advances all rows by one step. Must be called by every thread of a parallel region (thread number and
/// slabs as in deal_planes); returns when all rows of all threads are done.
void sweep(Schedule schedule, const RowExtent& rows, const std::vector<int>& slabs, int thread,
           RowWork& work);

}  // namespace wanewall
