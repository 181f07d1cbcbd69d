// Included by row_kernels_*.cpp after row_kernels.inl, in the same namespace and for the same vector width.
#include "solver/table_kernels.hpp"

namespace wanewall {
namespace WANEWALL_VECTOR_NAMESPACE {

/// Weights: product over the other points of (x - x_j)/(x_i - x_j) with x_j = -3..4 around the position's
/// floor.
inline void sample_table(const double* __restrict table, double origin, double step, int begin, int n,
                         double* __restrict out) {
#pragma omp simd
  for (int m = 0; m < n; ++m) {
    const double x = origin + (begin + m) * step;
    const int whole = static_cast<int>(x);  // the floor, since x >= 0
    const double f = x - whole;
    const double x0 = f + 3.0, x1 = f + 2.0, x2 = f + 1.0, x4 = f - 1.0, x5 = f - 2.0, x6 = f - 3.0,
                 x7 = f - 4.0;
    const double below1 = x0, below2 = x0 * x1, below3 = below2 * x2, below4 = below3 * f,
                 below5 = below4 * x4, below6 = below5 * x5, below7 = below6 * x6;
    const double above6 = x7, above5 = x7 * x6, above4 = above5 * x5, above3 = above4 * x4,
                 above2 = above3 * f, above1 = above2 * x2, above0 = above1 * x1;
    const int at = whole - 3;
    double sum = above0 * (-1.0 / 5040.0) * table[at + 0];
    sum += below1 * above1 * (1.0 / 720.0) * table[at + 1];
    sum += below2 * above2 * (-1.0 / 240.0) * table[at + 2];
    sum += below3 * above3 * (1.0 / 144.0) * table[at + 3];
    sum += below4 * above4 * (-1.0 / 144.0) * table[at + 4];
    sum += below5 * above5 * (1.0 / 240.0) * table[at + 5];
    sum += below6 * above6 * (-1.0 / 720.0) * table[at + 6];
    sum += below7 * (1.0 / 5040.0) * table[at + 7];
    out[m] = sum;
  }
}

template <class Real>
void add_incident(Real* __restrict out, double factor, const double* __restrict gain,
                  const double* __restrict incident, int n) {
#pragma omp simd
  for (int m = 0; m < n; ++m) out[m] += static_cast<Real>(factor * gain[m] * incident[m]);
}

template <class Real>
void add_samples(const Real* __restrict samples, std::size_t stride, std::size_t n_samples,
                 const double* __restrict cosine, const double* __restrict minus_sine, double* __restrict real,
                 double* __restrict imag, std::size_t n) {
  // The sums of a strip of positions stay in registers while all samples pass.
  constexpr std::size_t strip = 16;
  std::size_t from = 0;
  for (; from + strip <= n; from += strip) {
    double re[strip], im[strip];
    for (std::size_t m = 0; m < strip; ++m) {
      re[m] = real[from + m];
      im[m] = imag[from + m];
    }
    for (std::size_t s = 0; s < n_samples; ++s) {
      const Real* sample = samples + s * stride + from;
      const double c = cosine[s], i = minus_sine[s];
      for (std::size_t m = 0; m < strip; ++m) {
        const auto value = static_cast<double>(sample[m]);
        re[m] += c * value;
        im[m] += i * value;
      }
    }
    for (std::size_t m = 0; m < strip; ++m) {
      real[from + m] = re[m];
      imag[from + m] = im[m];
    }
  }
  for (; from < n; ++from) {
    for (std::size_t s = 0; s < n_samples; ++s) {
      const auto value = static_cast<double>(samples[s * stride + from]);
      real[from] += cosine[s] * value;
      imag[from] += minus_sine[s] * value;
    }
  }
}

}  // namespace WANEWALL_VECTOR_NAMESPACE
}  // namespace wanewall
