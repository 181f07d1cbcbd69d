// Interpolation in an evenly spaced table, compiled for the same vector widths as the row kernels.
#pragma once

#include "solver/row_kernels.hpp"

namespace wanewall {

/// Points of the table that one interpolated value uses.
inline constexpr int table_taps = 8;

/// out[m] = table at position first + m step, m < n, in units of the table's spacing, by 8-point Lagrange
/// interpolation. Contract: every position x satisfies 3 <= x and the table holds points floor(x) - 3 ..
/// floor(x) + 4.
using SampleTable = void (*)(const double* table, double first, double step, int n, double* out);
SampleTable sample_table(VectorCode code);

/// out[m] += factor gain[m] incident[m], m < n, the product in double.
template <class Real>
using AddIncident = void (*)(Real* out, double factor, const double* gain, const double* incident, int n);
template <class Real>
AddIncident<Real> add_incident(VectorCode code);

}  // namespace wanewall
