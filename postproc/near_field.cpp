#include "postproc/near_field.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <stdexcept>

#include "geometry/constants.hpp"

namespace wanewall {
namespace {

constexpr double edge_tolerance = 1e-6;      // of the smallest spacing
constexpr double evenness_tolerance = 1e-3;  // of the sample spacing
constexpr double lone_point_tolerance_m = 1e-9;

double tolerance_of(const RecordedField& field) {
  double smallest_m = std::numeric_limits<double>::infinity();
  for (const std::vector<double>& points_m : field.positions_m)
    for (std::size_t n = 1; n < points_m.size(); ++n)
      smallest_m = std::min(smallest_m, points_m[n] - points_m[n - 1]);
  return std::isfinite(smallest_m) ? edge_tolerance * smallest_m : lone_point_tolerance_m;
}

/// Lagrange's weights of `count` points from `first` on, at x.
std::vector<double> polynomial_weights(const std::vector<double>& points_m, int first, int count,
                                       double x_m) {
  std::vector<double> weights(static_cast<std::size_t>(count), 1.0);
  const double* p = points_m.data() + first;
  for (int i = 0; i < count; ++i)
    for (int j = 0; j < count; ++j)
      if (j != i) weights[static_cast<std::size_t>(i)] *= (x_m - p[j]) / (p[i] - p[j]);
  return weights;
}

std::optional<AxisStencil> axis_stencil(const std::vector<double>& points_m, double x_m, double tolerance_m,
                                        Interpolation interpolation) {
  if (points_m.empty() || !(x_m >= points_m.front() - tolerance_m && x_m <= points_m.back() + tolerance_m))
    return std::nullopt;
  const int n = static_cast<int>(points_m.size());
  if (n == 1) return AxisStencil{0, {1.0}};
  const auto above = std::upper_bound(points_m.begin(), points_m.end(), x_m);
  const int interval = std::clamp(static_cast<int>(above - points_m.begin()) - 1, 0, n - 2);
  const int count = interpolation == Interpolation::cubic && n >= 4 ? 4 : 2;
  // The interval in the middle of the stencil where the points allow it.
  const int first = std::clamp(interval - (count / 2 - 1), 0, n - count);
  return AxisStencil{first, polynomial_weights(points_m, first, count, x_m)};
}

double weighted_sum(const std::array<AxisStencil, 3>& stencil, const std::vector<double>& values) {
  const auto& [x, y, z] = stencil;
  if (values.size() != x.weights.size() * y.weights.size() * z.weights.size())
    throw std::logic_error("a recorded field has loaded another number of values than asked for");
  double sum = 0.0;
  std::size_t at = 0;
  for (const double wx : x.weights)
    for (const double wy : y.weights)
      for (const double wz : z.weights) sum += wx * wy * wz * values[at++];
  return sum;
}

}  // namespace

Extent extent_of(const RecordedField& field) {
  Extent extent;
  for (std::size_t a = 0; a < 3; ++a) {
    extent.lo_m[a] = field.positions_m[a].front();
    extent.hi_m[a] = field.positions_m[a].back();
  }
  return extent;
}

Extent common_extent(const std::vector<RecordedField>& fields) {
  constexpr double infinity = std::numeric_limits<double>::infinity();
  Extent common{{-infinity, -infinity, -infinity}, {infinity, infinity, infinity}};
  for (const RecordedField& field : fields) {
    const Extent own = extent_of(field);
    for (std::size_t a = 0; a < 3; ++a) {
      common.lo_m[a] = std::max(common.lo_m[a], own.lo_m[a]);
      common.hi_m[a] = std::min(common.hi_m[a], own.hi_m[a]);
    }
  }
  return common;
}

std::optional<std::array<AxisStencil, 3>> stencil_at(const RecordedField& field, const Vec3& point_m,
                                                     Interpolation interpolation) {
  const double tolerance_m = tolerance_of(field);
  std::array<AxisStencil, 3> stencil;
  for (std::size_t a = 0; a < 3; ++a) {
    const auto along = axis_stencil(field.positions_m[a], point_m[a], tolerance_m, interpolation);
    if (!along) return std::nullopt;
    stencil[a] = *along;
  }
  return stencil;
}

std::optional<FieldSeries> series_at(const RecordedField& field, const Vec3& point_m,
                                     Interpolation interpolation) {
  const auto stencil = stencil_at(field, point_m, interpolation);
  if (!stencil) return std::nullopt;
  FieldSeries series;
  series.component = field.component;
  series.steps = field.steps;
  series.times_s = field.times_s;
  Index3 begin{}, end{};
  for (std::size_t a = 0; a < 3; ++a) {
    series.degree[a] = (*stencil)[a].degree();
    begin[a] = (*stencil)[a].first;
    end[a] = begin[a] + static_cast<int>((*stencil)[a].weights.size());
  }
  for (std::size_t which = 0; which < field.times_s.size(); ++which)
    series.values.push_back(weighted_sum(*stencil, field.load(which, begin, end)));
  return series;
}

double sample_spacing_s(const FieldSeries& series) {
  const std::vector<double>& t = series.times_s;
  if (t.size() < 2) throw std::invalid_argument("a spectrum needs at least two recorded steps");
  const double spacing_s = (t.back() - t.front()) / static_cast<double>(t.size() - 1);
  for (std::size_t n = 1; n < t.size(); ++n)
    if (!(std::abs(t[n] - t[n - 1] - spacing_s) <= evenness_tolerance * spacing_s))
      throw std::invalid_argument("a spectrum needs evenly spaced recorded steps");
  return spacing_s;
}

std::complex<double> spectrum_at(const FieldSeries& series, double frequency_hz) {
  const double spacing_s = sample_spacing_s(series);
  const double omega_rad_per_s = 2.0 * pi * frequency_hz;
  std::complex<double> sum = 0.0;
  for (std::size_t n = 0; n < series.values.size(); ++n)
    sum += series.values[n] * std::polar(1.0, -omega_rad_per_s * series.times_s[n]);
  return spacing_s * sum;
}

}  // namespace wanewall
