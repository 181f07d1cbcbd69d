// What the rows are made of, in the form the kernels read: spans of update coefficients, shared between equal
// rows.
//
//   E:  decay = (1 - s)/(1 + s),  gain = c0 dt / (eps_r (1 + s)),  s = sigma dt / (2 eps0 eps_r)
//   H:  decay = (1 - s)/(1 + s),  gain = c0 dt / (mu_r (1 + s)),   s = sigma* dt / (2 mu0 mu_r)
// in the scaling of solver/fields.hpp (H stored as eta0 H). Entries that do not exist, lie in a perfect
// conductor, or are tangential E on an outer electric wall have 0, 0 and stay zero. A matched slab adds the
// same rate of loss to E and H (sigma/eps = sigma*/mu), at each component's own depth, summed over the axes.
#pragma once

#include <deque>
#include <memory>
#include <unordered_map>
#include <vector>

#include "solver/aligned_array.hpp"
#include "solver/fields.hpp"
#include "solver/problem.hpp"
#include "solver/row_kernels.hpp"

namespace wanewall {

/// Update coefficients of one edge or face, before rounding to storage.
struct UpdateCoefficients {
  double decay = 0.0;
  double gain = 0.0;  ///< [m]
};
UpdateCoefficients update_coefficients(double relative, double loss_rate_per_s, double dt_s);

/// One row's spans, and the gains of its x and y components inside the z layers.
template <class Real>
struct RowMedia {
  std::vector<MediaSpan<Real>> spans;
  AlignedArray<Real> mixed;
  std::vector<Real> z_layer_gain;  ///< [low x][low y][high x][high y], each as long as that layer's window
  UpdateCoefficients at(int component, int k) const;
};

template <class Real>
class MediaRows {
 public:
  /// Paints and compresses all rows of E (or H) with `threads` threads.
  MediaRows(const Problem& problem, const RowLayout& layout, bool electric, int threads);

  const RowMedia<Real>& row(int i, int j) const {
    return *rows_[static_cast<std::size_t>(i) * static_cast<std::size_t>(ny_ + 1) +
                  static_cast<std::size_t>(j)];
  }
  std::size_t bytes() const;

 private:
  int ny_ = 0;
  std::vector<const RowMedia<Real>*> rows_;
  std::vector<std::deque<RowMedia<Real>>> pools_;  // one per thread
};

}  // namespace wanewall
