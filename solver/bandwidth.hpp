// What the memory gives: the two loops by which people measure it. Used by `wanewall speed` and by nothing
// else.
//   Source: J. D. McCalpin, "Memory bandwidth and machine balance in current high performance computers",
//   IEEE TCCA Newsletter (December 1995); the bytes counted are those the program names, as there.
#pragma once

#include <cstddef>

#include "solver/aligned_array.hpp"

namespace wanewall {

class BandwidthLoops {
 public:
  /// Three arrays of `size` numbers, touched first by the threads that will use them.
  BandwidthLoops(std::size_t size, int threads);
  /// b = a, once. Returns the bytes named: 8 per number.
  double copy();
  /// a = b + s c, once. Returns the bytes named: 12 per number.
  double triad();

 private:
  std::size_t size_;
  int threads_;
  AlignedArray<float> a_, b_, c_;
};

}  // namespace wanewall
