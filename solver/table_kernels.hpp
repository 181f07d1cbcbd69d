// Interpolation in an evenly spaced table and sums of a running DFT, compiled for the same vector widths as
// the row kernels.
#pragma once

#include "solver/row_kernels.hpp"

namespace wanewall {

/// Points of the table that one interpolated value uses.
inline constexpr int table_taps = 8;

/// out[m] = table at position origin + (begin + m) step, m < n, in units of the table's spacing, by 8-point
/// Lagrange interpolation. Contract: every position x satisfies 3 <= x and the table holds points floor(x) -
/// 3 .. floor(x) + 4.
using SampleTable = void (*)(const double* table, double origin, double step, int begin, int n, double* out);
SampleTable sample_table(VectorCode code);

/// out[m] += factor gain[m] incident[m], m < n, the product in double.
template <class Real>
using AddIncident = void (*)(Real* out, double factor, const double* gain, const double* incident, int n);
template <class Real>
AddIncident<Real> add_incident(VectorCode code);

/// Positions that lie together in the sums of a running DFT.
inline constexpr std::size_t sum_group = 8;

/// Samples of a field at positions, and the sums of their running DFT at several frequencies:
///   real[f][m] += sum over s of cosine[f][s] sample[s][m], imag likewise with minus_sine; in double, in the
///   order of s.
/// Sums lie as [group of positions][frequency][real, imag][position in the group], so that they pass through
/// the memory in one stream. Positions up to the end of the last group are read.
template <class Real>
struct SampleBlock {
  const Real* samples = nullptr;  ///< [n_samples][position], rows `sample_stride` apart
  std::size_t sample_stride = 0, n_samples = 0;
  const double* cosine = nullptr;      ///< [n_frequencies][n_samples]
  const double* minus_sine = nullptr;  ///< likewise
  std::size_t n_frequencies = 0;
  double* sums = nullptr;
  std::size_t n_groups = 0;
};
template <class Real>
using AddSamples = void (*)(const SampleBlock<Real>& block);
template <class Real>
AddSamples<Real> add_samples(VectorCode code);

}  // namespace wanewall
