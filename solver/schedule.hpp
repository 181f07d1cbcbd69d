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

/// Rows i0 <= i < i1, j0 <= j < j1.
struct RowBlock {
  int i0 = 0, i1 = 0, j0 = 0, j1 = 0;
};

/// The work of rows. Called from many threads, for different rows at once.
class RowWork {
 public:
  virtual ~RowWork() = default;
  /// A block is one group along x times one along y.
  virtual void advance_e(const RowBlock& block) = 0;
  virtual void advance_h(int i, int j) = 0;
};

/// Rows that exist, for E and H alike, in groups whose E must be advanced together: the nodes of a Moebius
/// layer along its normal. All others are groups of one. Group a along x is i_begin[a] <= i < i_begin[a + 1].
struct RowGroups {
  std::vector<int> i_begin{0}, j_begin{0};
  int band = 4096;  ///< groups along y that the fused sweep takes at a time, see rows_per_band

  int n_i() const { return static_cast<int>(i_begin.size()) - 1; }
  int n_j() const { return static_cast<int>(j_begin.size()) - 1; }
};

/// Rows of which two planes, all six fields, fill half of a second-level cache of 1 MiB.
int rows_per_band(std::size_t row_bytes);

/// Groups along x dealt to threads as slabs of nearly equal numbers of planes; slab t is the groups
/// [begin[t], begin[t + 1]).
std::vector<int> deal_groups(const std::vector<int>& i_begin, int threads);

/// Advances all rows by one step. Must be called by every thread of a parallel region (thread number and
/// slabs as in deal_groups); returns when all rows of all threads are done.
void sweep(Schedule schedule, const RowGroups& rows, const std::vector<int>& slabs, int thread,
           RowWork& work);

}  // namespace wanewall
