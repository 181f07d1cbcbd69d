// The update of a Moebius layer, and what its columns need.
//
// Only the differences along the layer's normal change. With df the plain difference, cells j = 0 .. N - 1
// and nodes j = 0 .. N counted outwards from the layer's first node, tangential E held at zero on node N:
//
//   H update, at cell j:   df -> S^-1 df:   used = df/s0 + psi;  then  psi <- b' psi + r' df
//   E update, at nodes 0 .. N - 1 (the first node included):   df -> g = M^-1 df:
//       f_j = A_j - D_j + A_(j-1) + D_(j-1),   M0 g = df - f/4,   g_N = 0
//       then  A_j <- b A_j + r (g_j + g_(j+1)),   D_j <- b' D_j + r' (g_(j+1) - g_j)
//   M0 tridiagonal: diagonal (s0_(j-1) + 1/s0_(j-1) + s0_j + 1/s0_j)/4 with s0_(-1) = 1, beside it
//   (s0_j - 1/s0_j)/4.
//   G = (sigma dt/2 eps0)/(1 + alpha dt/2 eps0),   b = (1 - alpha dt/2 eps0)/(1 + alpha dt/2 eps0),
//   s0 = kappa + G,   r = G (1 + b),   b' = (kappa b - G)/s0,   r' = (b' - b)/s0.
//
// Layers of different axes act on different indices, so where they overlap their differences are just both
// used. The mesh must be uniform along the normal from one cell in front of the layer outwards.
#pragma once

#include <vector>

#include "solver/aligned_array.hpp"
#include "solver/fields.hpp"
#include "solver/layer_tasks.hpp"
#include "solver/problem.hpp"

namespace wanewall {

/// One layer in double precision, all arrays per cell outwards.
struct MoebiusUpdate {
  std::vector<double> inv_s0, b_inverse, r_inverse;  ///< H side
  std::vector<double> b, r;
  std::vector<double> lower, inv_diagonal;  ///< LDL^T of M0; lower[0] = 0
  int cells() const { return static_cast<int>(b.size()); }
  /// M0^-1, [node][node].
  std::vector<std::vector<double>> dense() const;
};
/// Throws std::invalid_argument when arrays differ in length, or a value is active, not finite or too long.
MoebiusUpdate moebius_update(const MoebiusTable& table, double dt_s);

/// Throws ProblemError when a Moebius face cannot be updated as it stands: its table, its cells on the
/// lattice, or a mesh that is not uniform there.
void check_moebius_faces(const Problem& problem);

/// Where the z part of a layer lies in a row.
struct ZWindow {
  int begin = 0;  ///< k of entry 0
  int length = 0;
  int first = 0, last = 0;  ///< entries that belong to the layer
};
/// Windows of a z face's E nodes (or H half nodes); length 0 without a recursion of its own there. They are
/// padded to whole blocks; but only that of Moebius E where the row is too short for it.
ZWindow z_window(const Problem& problem, Side side, bool electric, const RowLayout& layout,
                 std::size_t bytes_per_value);

/// The E side of one Moebius layer in the precision of the fields, and where its columns lie.
template <class Real>
class MoebiusColumns {
 public:
  MoebiusColumns() = default;
  MoebiusColumns(const Problem& problem, Side side, const RowLayout& layout);
  int cells() const { return cells_; }
  /// First and one past the last index of its E nodes along the axis.
  IndexRange nodes() const { return nodes_; }
  bool outwards_is_up() const { return outwards_is_up_; }
  /// Node 0 and the direction outwards along the axis.
  int first_node() const { return outwards_is_up_ ? nodes_.begin : nodes_.end - 1; }
  int step() const { return outwards_is_up_ ? 1 : -1; }
  MoebiusNumbers<Real> numbers() const;
  /// For z faces: begin, lengths and arrays; gains and memory are the row's.
  ZMoebiusTask<Real> z_task() const { return z_task_; }

 private:
  int cells_ = 0;
  bool outwards_is_up_ = false;
  IndexRange nodes_{0, 0};
  AlignedArray<Real> per_cell_;   // six arrays of cells + 1
  AlignedArray<Real> z_numbers_;  // four arrays of the window's length
  AlignedArray<Real> z_dense_;
  ZMoebiusTask<Real> z_task_;
};

}  // namespace wanewall
