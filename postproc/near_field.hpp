// The field at any point inside recorded snapshots: time series and spectra. Data in, data out.
#pragma once

#include <array>
#include <complex>
#include <functional>
#include <optional>
#include <string>
#include <vector>

#include "geometry/lattice.hpp"

namespace wanewall {

/// One field component as it was recorded: on which points, when, and a way to get at its values.
struct RecordedField {
  Component component = Component::ex;
  std::array<std::vector<double>, 3> positions_m;  ///< increasing along each axis
  std::vector<long> steps;
  std::vector<double> times_s;  ///< as many as steps; n dt for E, (n + 1/2) dt for H
  /// Values at the points [begin, end) at the recorded step number `which`, index order [x][y][z]; V/m or
  /// A/m.
  std::function<std::vector<double>(std::size_t which, const Index3& begin, const Index3& end)> load;
};

/// Polynomials along each axis, through a component's own points around the wanted one.
enum class Interpolation {
  linear,  ///< two points: error of second order in the spacing
  cubic  ///< four points where an axis has them: error of fourth order; overshoots across boundaries of media
};

/// Weights of the points [first, first + weights.size()) of one axis. One point: the coordinate itself was
/// recorded.
struct AxisStencil {
  int first = 0;
  std::vector<double> weights;
  int degree() const { return static_cast<int>(weights.size()) - 1; }
};

/// Where a component's points begin and end along each axis.
struct Extent {
  Vec3 lo_m{};
  Vec3 hi_m{};
};
Extent extent_of(const RecordedField& field);
/// The box in which all of the components can be interpolated; empty (lo > hi) where they do not overlap.
Extent common_extent(const std::vector<RecordedField>& fields);

/// Weights at a point, along each axis; empty when the point lies outside the component's points. A millionth
/// of the smallest spacing counts as on the edge, or on the plane.
std::optional<std::array<AxisStencil, 3>> stencil_at(const RecordedField& field, const Vec3& point_m,
                                                     Interpolation interpolation);

/// One component at one point. V/m or A/m.
struct FieldSeries {
  Component component = Component::ex;
  std::array<int, 3> degree{};  ///< of the polynomial along each axis; 0: the coordinate itself was recorded
  std::vector<long> steps;
  std::vector<double> times_s;
  std::vector<double> values;
};

/// Empty when the point lies outside the component's points.
std::optional<FieldSeries> series_at(const RecordedField& field, const Vec3& point_m,
                                     Interpolation interpolation);

/// Time between two samples [s]. Throws std::invalid_argument unless there are at least two, evenly spaced to
/// a thousandth.
double sample_spacing_s(const FieldSeries& series);

/// F = T sum_n f(t_n) exp(-j omega t_n), T the sample spacing and t_n the component's own times; V s/m or A
/// s/m. Means nothing at and above 1 / (2 T). Throws as sample_spacing_s does.
std::complex<double> spectrum_at(const FieldSeries& series, double frequency_hz);

}  // namespace wanewall
