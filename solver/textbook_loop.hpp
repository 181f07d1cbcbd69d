// The yardstick for speed: the loop that everybody writes first. Two passes, one coefficient array per
// component and constant, no layers, no sources, no recorders. Used by `wanewall speed` and by nothing else.
#pragma once

#include <array>

#include "solver/aligned_array.hpp"

namespace wanewall {

/// A closed metal cube of n^3 cells in vacuum, single precision, at a given c0 dt / d.
class TextbookLoop {
 public:
  TextbookLoop(int n, float courant_per_axis, int threads);
  void advance(int steps);
  /// Value of component c (Ex, Ey, Ez, Hx, Hy, Hz; H as eta0 H) at (i, j, k).
  float& at(int c, int i, int j, int k) { return fields_[static_cast<std::size_t>(c)][index(i, j, k)]; }

 private:
  std::size_t index(int i, int j, int k) const {
    const auto m = static_cast<std::size_t>(n_ + 1);
    return (static_cast<std::size_t>(i) * m + static_cast<std::size_t>(j)) * m + static_cast<std::size_t>(k);
  }
  int n_, threads_;
  std::array<AlignedArray<float>, 6> fields_, decay_, gain_;
};

}  // namespace wanewall
