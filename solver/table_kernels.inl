// Included by row_kernels_*.cpp after row_kernels.inl, in the same namespace and for the same vector width.
#include <utility>

#include "solver/table_kernels.hpp"

namespace wanewall {
namespace WANEWALL_VECTOR_NAMESPACE {

/// One vector of doubles, and the transposition of a square of them.
struct Doubles {
  static constexpr int width = WANEWALL_VECTOR_BYTES / 8;
  typedef double Vector __attribute__((vector_size(WANEWALL_VECTOR_BYTES), aligned(8), may_alias));

  /// rows[r][l] becomes rows[l][r]: squares of `by` entries change places, then squares of half the size.
  template <int by = 1>
  static void transpose(Vector (&rows)[width]) {
    if constexpr (by < width) {
#pragma GCC unroll 8
      for (int r = 0; r < width; ++r) {
        if (r & by) continue;
        const Vector low = rows[r], high = rows[r + by];
        rows[r] = mixed<by, false>(low, high, std::make_integer_sequence<int, width>());
        rows[r + by] = mixed<by, true>(low, high, std::make_integer_sequence<int, width>());
      }
      transpose<2 * by>(rows);
    }
  }

 private:
  template <int by, bool upper, int... lane>
  static Vector mixed(Vector low, Vector high, std::integer_sequence<int, lane...>) {
    return __builtin_shufflevector(low, high,
                                   (upper ? ((lane & by) ? lane + width : lane + by)
                                          : ((lane & by) ? lane - by + width : lane))...);
  }
};

/// Weights: product over the other points of (x - x_j)/(x_i - x_j) with x_j = -3..4 around the position's
/// floor. The table's values are read point by point, in whole vectors, and turned: gathering them costs several
/// times as much.
inline void sample_vector(const double* table, double origin, double step, int begin, int n, double* out) {
  using D = Doubles;
  typedef int Whole __attribute__((vector_size(D::width * sizeof(int)), may_alias));
  typename D::Vector count{};
  for (int m = 0; m < D::width; ++m) count[m] = begin + (m < n ? m : 0);  // the rest repeats the first
  const typename D::Vector x = origin + count * step;
  const auto whole = __builtin_convertvector(x, Whole);  // the floor, since x >= 0
  const typename D::Vector f = x - __builtin_convertvector(whole, typename D::Vector);
  alignas(64) int first[D::width];
  *reinterpret_cast<Whole*>(first) = whole;
  typename D::Vector tap[table_taps];
  for (int part = 0; part < table_taps; part += D::width) {
    typename D::Vector square[D::width];
#pragma GCC unroll 8
    for (int m = 0; m < D::width; ++m)
      square[m] = *reinterpret_cast<const typename D::Vector*>(table + (first[m] - 3 + part));
    D::transpose(square);
#pragma GCC unroll 8
    for (int t = 0; t < D::width; ++t) tap[part + t] = square[t];
  }
  const auto x0 = f + 3.0, x1 = f + 2.0, x2 = f + 1.0, x4 = f - 1.0, x5 = f - 2.0, x6 = f - 3.0, x7 = f - 4.0;
  const auto below2 = x0 * x1, below3 = below2 * x2, below4 = below3 * f, below5 = below4 * x4,
             below6 = below5 * x5, below7 = below6 * x6;
  const auto above5 = x7 * x6, above4 = above5 * x5, above3 = above4 * x4, above2 = above3 * f,
             above1 = above2 * x2, above0 = above1 * x1;
  auto sum = above0 * (-1.0 / 5040.0) * tap[0];
  sum += x0 * above1 * (1.0 / 720.0) * tap[1];
  sum += below2 * above2 * (-1.0 / 240.0) * tap[2];
  sum += below3 * above3 * (1.0 / 144.0) * tap[3];
  sum += below4 * above4 * (-1.0 / 144.0) * tap[4];
  sum += below5 * above5 * (1.0 / 240.0) * tap[5];
  sum += below6 * x7 * (-1.0 / 720.0) * tap[6];
  sum += below7 * (1.0 / 5040.0) * tap[7];
  if (n >= D::width)
    *reinterpret_cast<typename D::Vector*>(out) = sum;
  else
    for (int m = 0; m < n; ++m) out[m] = sum[m];
}

inline void sample_table(const double* table, double origin, double step, int begin, int n, double* out) {
  for (int m = 0; m < n; m += Doubles::width) sample_vector(table, origin, step, begin + m, n - m, out + m);
}

template <class Real>
void add_incident(Real* __restrict out, double factor, const double* __restrict gain,
                  const double* __restrict incident, int n) {
#pragma omp simd
  for (int m = 0; m < n; ++m) out[m] += static_cast<Real>(factor * gain[m] * incident[m]);
}

/// `n_together` frequencies of one group of positions: their sums stay in registers while all samples pass.
template <class Real, int n_together>
inline void add_samples_at(const SampleBlock<Real>& b, const Real* samples, std::size_t f, double* sums) {
  using Vector = Doubles::Vector;
  typedef Real Values __attribute__((vector_size(sizeof(Real) * Doubles::width), aligned(sizeof(Real)), may_alias));
  constexpr int parts = static_cast<int>(sum_group) / Doubles::width;
  const double* const cosine = b.cosine + f * b.n_samples;
  const double* const minus_sine = b.minus_sine + f * b.n_samples;
  const auto at = [&](int t, int imag, int part) {
    return reinterpret_cast<Vector*>(sums + (f + static_cast<std::size_t>(t)) * 2 * sum_group +
                                     static_cast<std::size_t>(imag) * sum_group +
                                     static_cast<std::size_t>(part * Doubles::width));
  };
  Vector re[n_together][parts], im[n_together][parts];
  for (int t = 0; t < n_together; ++t)
    for (int part = 0; part < parts; ++part) {
      re[t][part] = *at(t, 0, part);
      im[t][part] = *at(t, 1, part);
    }
  for (std::size_t s = 0; s < b.n_samples; ++s) {
    for (int part = 0; part < parts; ++part) {
      const auto sample =
          *reinterpret_cast<const Values*>(samples + s * b.sample_stride + static_cast<std::size_t>(part * Doubles::width));
      const Vector value = __builtin_convertvector(sample, Vector);
      for (int t = 0; t < n_together; ++t) {
        re[t][part] += cosine[static_cast<std::size_t>(t) * b.n_samples + s] * value;
        im[t][part] += minus_sine[static_cast<std::size_t>(t) * b.n_samples + s] * value;
      }
    }
  }
  for (int t = 0; t < n_together; ++t)
    for (int part = 0; part < parts; ++part) {
      *at(t, 0, part) = re[t][part];
      *at(t, 1, part) = im[t][part];
    }
}

template <class Real>
void add_samples(const SampleBlock<Real>& block) {
  const SampleBlock<Real> b = block;  // of our own, so that no store can change it
  constexpr std::size_t together = Doubles::width == 8 ? 4 : 2;
  for (std::size_t g = 0; g < b.n_groups; ++g) {
    double* const sums = b.sums + g * b.n_frequencies * 2 * sum_group;
    const Real* const samples = b.samples + g * sum_group;
    std::size_t f = 0;
    for (; f + together <= b.n_frequencies; f += together)
      add_samples_at<Real, static_cast<int>(together)>(b, samples, f, sums);
    for (; f < b.n_frequencies; ++f) add_samples_at<Real, 1>(b, samples, f, sums);
  }
}

}  // namespace WANEWALL_VECTOR_NAMESPACE
}  // namespace wanewall
