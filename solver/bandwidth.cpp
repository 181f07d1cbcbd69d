#include "solver/bandwidth.hpp"

namespace wanewall {

BandwidthLoops::BandwidthLoops(std::size_t size, int threads)
    : size_(size), threads_(threads), a_(size), b_(size), c_(size) {
#pragma omp parallel for num_threads(threads_) schedule(static)
  for (std::size_t n = 0; n < size_; ++n) {
    a_[n] = 0.5f;
    b_[n] = 0.25f;
    c_[n] = 0.125f;
  }
}

double BandwidthLoops::copy() {
  const float* a = a_.data();
  float* b = b_.data();
#pragma omp parallel for simd num_threads(threads_) schedule(static)
  for (std::size_t n = 0; n < size_; ++n) b[n] = a[n];
  return 8.0 * static_cast<double>(size_);
}

double BandwidthLoops::triad() {
  float* a = a_.data();
  const float *b = b_.data(), *c = c_.data();
#pragma omp parallel for simd num_threads(threads_) schedule(static)
  for (std::size_t n = 0; n < size_; ++n) a[n] = b[n] + 0.5f * c[n];
  return 12.0 * static_cast<double>(size_);
}

}  // namespace wanewall
