// The stretched differences of one axis, and the memory the recursive convolution needs inside its two
// layers.
//
//   stretched difference = difference / (spacing kappa) + psi,   psi(n) = b psi(n-1) + c difference
//   b = exp(-(sigma/kappa + alpha) dt/eps0),  c = sigma (b - 1) / (sigma kappa + kappa^2 alpha) / spacing
// Source: J. A. Roden and S. D. Gedney, Microw. Opt. Technol. Lett. 27, 334 (2000).
#pragma once

#include <vector>

#include "solver/aligned_array.hpp"
#include "solver/fields.hpp"
#include "solver/problem.hpp"

namespace wanewall {

/// b and c/spacing at one node or half node.
struct Recursion {
  double b = 0.0;
  double c_per_m = 0.0;
};
Recursion layer_recursion(double sigma_s_per_m, double kappa, double alpha_s_per_m, double spacing_m,
                          double dt_s);

/// Numbers along one axis for E (at nodes) or H (at half nodes).
template <class Real>
struct Stretch {
  AlignedArray<Real> inv;  ///< 1/(spacing kappa) [1/m]; one per index, padded with zeros to whole lines
  std::vector<Real> b, c;  ///< one per index; zero outside the layers
  std::vector<int> slot;   ///< number of the index among those inside layers, -1 outside
  int n_slots = 0;
};
template <class Real>
Stretch<Real> make_stretch(const Problem& problem, Axis axis, bool electric, int padded_length);

/// psi rows of E or of H. Memory exists only inside layers.
template <class Real>
class LayerMemory {
 public:
  LayerMemory(const RowLayout& layout, int x_slots, int y_slots, int z_layer_cells);
  void zero_planes(int i_begin, int i_end, const std::vector<int>& x_slot);

  /// `which`: 0 for the component next(axis), 1 for the one after.
  Real* x(int slot, int j, int which) {
    return x_.data() + ((slot * (layout_.ny + 1L) + j) * 2 + which) * layout_.row;
  }
  Real* y(int slot, int i, int which) {
    return y_.data() + ((i * long{y_slots_} + slot) * 2 + which) * layout_.row;
  }
  /// psi of the row's x component in the low layer; then its y component, then the high layer's x and y.
  Real* z(int i, int j) { return z_.data() + (i * (layout_.ny + 1L) + j) * 2 * z_cells_; }
  static std::size_t bytes(const RowLayout& layout, int x_slots, int y_slots, int z_layer_cells);

 private:
  RowLayout layout_;
  int y_slots_, z_cells_;
  AlignedArray<Real> x_, y_, z_;
};

}  // namespace wanewall
