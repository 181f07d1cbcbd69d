// The stretched differences of one axis, and the memory that layers need inside their cells.
//
// cfs_pml:  stretched difference = difference / (spacing kappa) + psi,   psi(n) = b psi(n-1) + c difference
//   b = exp(-(sigma/kappa + alpha) dt/eps0),  c = sigma (b - 1) / (sigma kappa + kappa^2 alpha) / spacing
// Source: J. A. Roden and S. D. Gedney, Microw. Opt. Technol. Lett. 27, 334 (2000).
#pragma once

#include <array>
#include <span>
#include <vector>

#include "solver/aligned_array.hpp"
#include "solver/fields.hpp"
#include "solver/problem.hpp"
#include "solver/shell/moebius.hpp"

namespace wanewall {

/// b and c/spacing at one node or half node.
struct Recursion {
  double b = 0.0;
  double c_per_m = 0.0;
};
Recursion layer_recursion(double sigma_s_per_m, double kappa, double alpha_s_per_m, double spacing_m,
                          double dt_s);

/// Numbers along one axis for E (at nodes) or H (at half nodes): cfs_pml layers, and the H side of Moebius
/// layers, whose E side is solver/shell/moebius.hpp.
template <class Real>
struct Stretch {
  AlignedArray<Real> inv;  ///< 1/(spacing kappa) [1/m]; one per index, padded with zeros to whole lines
  std::vector<Real> b, c;  ///< one per index; zero outside the layers
  std::vector<char> late;  ///< one per index: psi acts before it takes in the new difference
  std::vector<int> slot;   ///< number of the index among those with memory, -1 without
  int n_slots = 0;
};
template <class Real>
Stretch<Real> make_stretch(const Problem& problem, Axis axis, bool electric, int padded_length);

/// What the layers of a problem must remember: cfs_pml E; H of both recursions; the columns of Moebius E.
enum class LayerPart { cfs_e, h, moebius_e };
struct LayerSizes {
  int x_slots = 0, y_slots = 0;
  int rows_per_slot = 2;
  int z_values = 0;
};
LayerSizes layer_sizes(const Problem& problem, LayerPart part, const RowLayout& layout,
                       std::size_t bytes_per_value);

/// Memory of the layers. Across x and y layers it is whole rows, `rows_per_slot` for each row of fields; in
/// z layers `z_values` for each row. Memory exists only inside layers.
template <class Real>
class LayerMemory {
 public:
  LayerMemory(const RowLayout& layout, const LayerSizes& sizes);
  void zero_planes(int i_begin, int i_end, const std::vector<int>& x_slot);

  Real* x(int slot, int j, int which) {
    return x_.data() + ((slot * (layout_.ny + 1L) + j) * rows_per_slot_ + which) * layout_.row;
  }
  Real* y(int slot, int i, int which) {
    return y_.data() + ((i * long{y_slots_} + slot) * rows_per_slot_ + which) * layout_.row;
  }
  Real* z(int i, int j) { return z_.data() + (i * (layout_.ny + 1L) + j) * z_values_; }
  /// From a slot to the next.
  std::ptrdiff_t x_stride() const { return (layout_.ny + 1L) * rows_per_slot_ * layout_.row; }
  std::ptrdiff_t y_stride() const { return rows_per_slot_ * layout_.row; }
  int z_values() const { return z_values_; }
  /// All of it: across x, across y, along z.
  std::array<std::span<Real>, 3> values() {
    return {std::span<Real>{x_.data(), x_.size()}, {y_.data(), y_.size()}, {z_.data(), z_.size()}};
  }
  static std::size_t bytes(const RowLayout& layout, const LayerSizes& sizes);

 private:
  RowLayout layout_;
  int y_slots_, rows_per_slot_, z_values_;
  AlignedArray<Real> x_, y_, z_;
};

}  // namespace wanewall
