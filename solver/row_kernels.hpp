// The arithmetic of one row. One source (row_kernels.inl) is compiled for several vector widths; the widest
// that the processor has is chosen once. All give the same bits: no fused multiply-add, the same order of
// operations per value.
#pragma once

#include <cstddef>
#include <string_view>

#include "solver/layer_tasks.hpp"

namespace wanewall {

/// Consecutive k of a row, a whole number of cache lines. A uniform span has two numbers per component, a
/// mixed one has arrays. For E: decay = ca [-], gain = cb [m]; for H: da, db. Entries that must not move have
/// 0, 0.
template <class Real>
struct MediaSpan {
  int begin = 0;
  int end = 0;
  Real decay[3]{};
  Real gain[3]{};
  const Real* mixed = nullptr;  ///< [component][decay, gain][end - begin], 64-byte aligned; null when uniform
};

/// One row and what it needs. Pointers lead to k = 0; rows are padded to whole cache lines and aligned to
/// them, except that reading one value before k = 0 and one cache line after the padding is allowed.
/// Neighbour rows may be any row.
///   E: minus_x, minus_y are H rows at i - 1 and j - 1;  H: plus_x, plus_y are E rows at i + 1 and j + 1.
template <class Real>
struct RowTask {
  Real* own[3]{};          ///< the row to advance: Ex, Ey, Ez or Hx, Hy, Hz
  const Real* other[3]{};  ///< the other field in the same row
  const Real* beside_x[3]{};
  const Real* beside_y[3]{};
  Real inv_x = 0;               ///< 1 / (spacing kappa) for differences along x [1/m]
  Real inv_y = 0;               ///< along y
  const Real* inv_z = nullptr;  ///< along z, one per k, aligned and padded like a row
  const MediaSpan<Real>* spans = nullptr;
  int n_spans = 0;
  /// Only a hint: a row that will be wanted soon lies `ahead` from this one; it is fetched for k in
  /// [ahead_begin, ahead_end).
  std::ptrdiff_t ahead = 0, ahead_begin = 0, ahead_end = 0;
  std::ptrdiff_t psi_ahead = 0;  ///< from this row's layer memory to the next row's; only a hint
  // Layer memory, one row per differentiated component; null outside the layers of that axis.
  //   psi(n) = b psi(n-1) + c difference,  c in 1/m; "first" belongs to the component next(axis), "second" to
  //   the component after that.
  Real x_b = 0, x_c = 0;
  Real* x_psi_first = nullptr;   ///< y component
  Real* x_psi_second = nullptr;  ///< z component
  Real y_b = 0, y_c = 0;
  Real* y_psi_first = nullptr;   ///< z component
  Real* y_psi_second = nullptr;  ///< x component
  /// H in a Moebius layer: psi acts before it takes in the new difference.
  bool x_late = false, y_late = false;
  /// E in a Moebius layer: the H differences along the axis, already solved for (ColumnTask); null elsewhere.
  const Real* x_given_first = nullptr;
  const Real* x_given_second = nullptr;
  const Real* y_given_first = nullptr;
  const Real* y_given_second = nullptr;
};

/// Ampere's law on one row,     E(n)   = decay E(n-1)   + gain curl H(n-1/2)
/// Faraday's law on one row,    H(n+1/2) = decay H(n-1/2) - gain curl E(n)
/// with differences along x and y stretched by their layers. What the z layers add is added by the others
/// (layer_tasks.hpp); moebius_columns runs before the rows it serves.
template <class Real>
struct RowKernels {
  void (*advance_e)(const RowTask<Real>&);
  void (*advance_h)(const RowTask<Real>&);
  void (*z_layer_e)(const RowTask<Real>&, const ZLayerTask<Real>&);
  void (*z_layer_h)(const RowTask<Real>&, const ZLayerTask<Real>&);
  void (*z_layer_h_late)(const RowTask<Real>&, const ZLayerTask<Real>&);
  void (*moebius_columns)(const ColumnTask<Real>&);
  void (*z_moebius_e)(const RowTask<Real>&, const ZMoebiusTask<Real>&);
  std::string_view name;
};

enum class VectorCode { baseline, avx2, avx512 };

/// The widest the processor has, and a given one (for tests; the processor must have it).
VectorCode best_vector_code();
template <class Real>
const RowKernels<Real>& row_kernels(VectorCode code);

}  // namespace wanewall
