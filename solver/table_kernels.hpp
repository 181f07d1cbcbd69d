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

/// real[m] += sum over s of cosine[s] samples[s stride + m], imag[m] likewise with minus_sine, m < n; in
/// double, in the order of s.
template <class Real>
using AddSamples = void (*)(const Real* samples, std::size_t stride, std::size_t n_samples,
                            const double* cosine, const double* minus_sine, double* real, double* imag,
                            std::size_t n);
template <class Real>
AddSamples<Real> add_samples(VectorCode code);

}  // namespace wanewall
