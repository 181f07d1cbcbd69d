// What the kernels of the absorbing layers work on: parts of a row inside z layers, and columns of rows
// across x or y layers.
#pragma once

#include <cstddef>

namespace wanewall {

/// The part of a row inside one cfs_pml z layer: n consecutive k from `begin`. For H also a Moebius layer's.
template <class Real>
struct ZLayerTask {
  int begin = 0;
  int n = 0;
  const Real* b = nullptr;       ///< [n]
  const Real* c = nullptr;       ///< [n], 1/m
  const Real* gain_x = nullptr;  ///< [n] gain of the x component
  const Real* gain_y = nullptr;
  std::ptrdiff_t ahead = 0;  ///< from this row's psi to the next row's; only a hint
  Real* psi_x = nullptr;     ///< [n]
  Real* psi_y = nullptr;
};

/// Longest Moebius layer the kernels take [cells].
inline constexpr int most_moebius_cells = 64;
/// The z part of a Moebius layer is padded to a multiple of this many bytes.
inline constexpr int moebius_block_bytes = 32;

/// Numbers of a Moebius layer's E side, one per cell outwards and one zero behind the last (see
/// solver/shell/moebius.hpp).
template <class Real>
struct MoebiusNumbers {
  const Real* lower = nullptr;
  const Real* inv_diagonal = nullptr;
  const Real* b = nullptr;
  const Real* r = nullptr;
  const Real* b_inverse = nullptr;
  const Real* r_inverse = nullptr;
};

/// M^-1 of the H differences along x or y, for the two components that differ along that axis, over whole
/// rows. Node j = 0 .. cells - 1 counts outwards from the layer's first node.
///   df_j = H row at node j minus the H row before it (in the direction of the axis)
///   A, D: the memory of cell j.
template <class Real>
struct ColumnTask {
  int cells = 0;
  std::ptrdiff_t row = 0;  ///< padded length, a whole number of cache lines
  MoebiusNumbers<Real> numbers;
  const Real* h[2]{};          ///< H row at node 0
  std::ptrdiff_t h_step = 0;   ///< from node j to node j + 1: outwards
  std::ptrdiff_t h_minus = 0;  ///< from a node's H row back to the one before it along the axis; positive
  Real* memory[2]{};           ///< A of cell 0; D is one row further
  std::ptrdiff_t memory_step = 0;
  std::ptrdiff_t h_ahead = 0;       ///< to the H rows that will be wanted next; only a hint
  std::ptrdiff_t memory_ahead = 0;  ///< to the memory that will be wanted next; only a hint
  Real* difference[2]{};            ///< out: (M^-1 df)_0
  std::ptrdiff_t difference_step = 0;
};

/// The part of an E row inside one Moebius z layer. All arrays have n = padded length entries in the order of
/// k; entries that are no node of the layer hold zeros.
template <class Real>
struct ZMoebiusTask {
  int begin = 0;                 ///< k of entry 0; may be negative when `fits` is false
  int n = 0;                     ///< a multiple of moebius_block_bytes
  int first = 0, last = 0;       ///< entries that are nodes: [first, last)
  bool outwards_is_up = true;    ///< the high layer
  bool fits = true;              ///< entries 0 .. n - 1 all lie in the row
  const Real* dense = nullptr;   ///< [source][n]: M^-1, columns first .. last - 1 are used
  MoebiusNumbers<Real> numbers;  ///< b, r, b_inverse, r_inverse as arrays of n
  const Real* gain_x = nullptr;  ///< [n]
  const Real* gain_y = nullptr;  ///< [n]
  Real* memory = nullptr;        ///< [A x][D x][A y][D y], each n
  std::ptrdiff_t ahead = 0;      ///< from this row's memory to the next row's; only a hint
};

}  // namespace wanewall
