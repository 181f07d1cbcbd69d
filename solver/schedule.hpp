// In which order rows are visited. A schedule knows nothing of what a row does.
//
// What it must keep:  E(i, j) at step s needs H(i, j), H(i-1, j), H(i, j-1) at s - 1/2;
//                     H(i, j) at s + 1/2 needs E(i, j), E(i+1, j), E(i, j+1) at s   (indices wrap on periodic
//                     axes);
// and a row must not move on before all that read it have done so. Any order that keeps these gives the same
// bits, because a row's own arithmetic is fixed.
#pragma once

#include <array>
#include <atomic>
#include <cstddef>
#include <memory>
#include <vector>

#include "solver/problem.hpp"

namespace wanewall {

/// Rows i0 <= i < i1, j0 <= j < j1.
struct RowBlock {
  int i0 = 0, i1 = 0, j0 = 0, j1 = 0;
};

/// Only a hint: when row (i, j) is advanced, row (i + planes, j + rows) will be wanted soon, and this is the
/// part-th of `parts` occasions to fetch it.
struct Ahead {
  int planes = 0, rows = 1;
  int part = 0, parts = 1;
};

/// The work of rows. Called from many threads, for different rows at once.
class RowWork {
 public:
  virtual ~RowWork() = default;
  /// Brings E of a block from step - 1 to step. A block is one group along x times whole groups along y.
  virtual void advance_e(const RowBlock& block, long step, const Ahead& ahead) = 0;
  /// Brings H of a block from step - 1/2 to step + 1/2.
  virtual void advance_h(const RowBlock& block, long step) = 0;
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

/// Advances all rows by one step, plain or fused. Must be called by every thread of a parallel region (thread
/// number and slabs as in deal_groups); returns when all rows of all threads are done.
void sweep(Schedule schedule, const RowGroups& rows, const std::vector<int>& slabs, int thread, long step,
           RowWork& work);

/// Time-skewed tiles: blocks of rows that are advanced several steps while they are in cache. A tile's edges
/// move one group down per step, so that it reads only rows that it or tiles below it have made:
///   tile (a, b) at its step s = 0, 1, ... :  E of groups [cut(a) - s, cut(a+1) - s),
///                                            H of groups [cut(a) - s - 1, cut(a+1) - s - 1),
/// along x, the same with b along y, cut off at the ends of the lattice. Tile (a, b) may start when (a-1, b)
/// and (a, b-1) are done. Groups are never cut, so a Moebius layer is one thick row.
/// Threads take strips of tiles along the axis on which tiles are short, x or y, and follow one another; each
/// waits only for the strip before its own. With tiles one plane thick, a strip is a wave front: what it
/// needs next to the core is as many planes of its own width as there are steps.
///
/// A periodic axis is not cut: its tiles hold all of it. Then threads take parts of the steps in place of
/// strips.
///   Source of the idea: M. J. Wolfe, "More iteration space tiling", Supercomputing (1989).
class TileSweep {
 public:
  /// Whether a lattice can be tiled at all: not when both x and y are periodic.
  static bool is_possible(const Lattice& lattice);

  /// `joined`: x, y are periodic, at most one of them.
  TileSweep(const RowGroups& rows, const std::array<bool, 2>& joined, int threads);

  /// Makes the tiles of the next block, `shape.steps` steps or fewer. One thread, between sweeps.
  void prepare(const TileShape& shape, long first_step, int n_steps);
  /// Advances all rows by the prepared steps. Must be called by every thread of a parallel region, and a
  /// barrier must follow.
  void sweep(RowWork& work);

  /// The sizes that a shape comes to here: an axis that is not cut has all its rows.
  TileShape real_shape(const TileShape& shape) const;

 private:
  struct Range {
    int begin = 0, end = 0;
    bool empty() const { return end <= begin; }
  };
  /// Tiles of one axis.
  struct Cuts {
    std::vector<int> at{0};  ///< groups; the last lies so far out that its skew ends at the wall
    int groups = 0;
    bool joined = false;
    int n() const { return joined ? 1 : static_cast<int>(at.size()) - 1; }
    Range e(int tile, int s) const;
    Range h(int tile, int s) const;
  };
  struct alignas(64) Progress {
    std::atomic<int> done{0};
  };
  static Cuts cut(const std::vector<int>& begin, bool joined, int rows_per_tile, int n_steps, int multiple);
  void advance_tile(int a, int b, int s_begin, int s_end, RowWork& work) const;

  const RowGroups& rows_;
  std::array<bool, 2> joined_;
  int threads_;
  Cuts x_, y_;
  long first_step_ = 0;
  int n_steps_ = 0, n_strips_ = 0, n_along_ = 0;
  int width_ = 0;  ///< of a tile along the strip
  bool moves_along_x_ = false;
  std::atomic<int> next_strip_{0};
  std::unique_ptr<Progress[]> progress_;
  int progress_size_ = 0;
};

}  // namespace wanewall
