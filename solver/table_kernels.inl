// Included by row_kernels_*.cpp after row_kernels.inl, in the same namespace and for the same vector width.
#include "solver/table_kernels.hpp"

namespace wanewall {
namespace WANEWALL_VECTOR_NAMESPACE {

/// Weights: product over the other points of (x - x_j)/(x_i - x_j) with x_j = -3..4 around the position's
/// floor.
inline void sample_table(const double* __restrict table, double first, double step, int n,
                         double* __restrict out) {
#pragma omp simd
  for (int m = 0; m < n; ++m) {
    const double x = first + m * step;
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

}  // namespace WANEWALL_VECTOR_NAMESPACE
}  // namespace wanewall
