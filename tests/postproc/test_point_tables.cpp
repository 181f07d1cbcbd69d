#include "postproc/point_tables.hpp"

#include <catch2/catch.hpp>
#include <cmath>
#include <limits>

#include "geometry/constants.hpp"

using namespace wanewall;

namespace {

constexpr double dt_s = 2e-11;

PointSeries series_of(std::vector<double> values) {
  PointSeries point{"above", {0.1, -0.2, 0.3}, {}};
  for (auto& component : point.values) component = values;
  return point;
}

}  // namespace

TEST_CASE("The peak keeps its sign and its own time", "[point_tables]") {
  const PointSeries point = series_of({0.0, 2.0, -3.0, 3.0, 1.0});
  const Peak e = peak_of(point, Component::ey, dt_s), h = peak_of(point, Component::hz, dt_s);
  CHECK(e.value == -3.0);
  CHECK(e.time_s == Approx(2.0 * dt_s));
  CHECK(h.value == -3.0);
  CHECK(h.time_s == Approx(2.5 * dt_s));  // H lives half a step later
  CHECK(peak_of(series_of({}), Component::ex, dt_s).value == 0.0);
  CHECK(peak_of(series_of({1.0, std::numeric_limits<double>::infinity(), -2.0}), Component::ex, dt_s).value ==
        -2.0);
}

TEST_CASE("The spectrum of a decaying exponential is a geometric series", "[point_tables]") {
  // sum r^n exp(-j omega n dt) = (1 - q^N)/(1 - q), q = r exp(-j omega dt): exact.
  const double r = 0.97, f_hz = 1.3e9;
  std::vector<double> values;
  for (int n = 0; n < 200; ++n) values.push_back(std::pow(r, n));
  const PointSeries point = series_of(values);
  const std::complex<double> q = std::polar(r, -2.0 * pi * f_hz * dt_s);
  const std::complex<double> exact = dt_s * (1.0 - std::pow(q, 200)) / (1.0 - q);
  const std::complex<double> e = spectrum_at(point, Component::ex, dt_s, f_hz);
  const std::complex<double> h = spectrum_at(point, Component::hx, dt_s, f_hz);
  CHECK(std::abs(e - exact) < 1e-12 * std::abs(exact));
  CHECK(std::abs(h - exact * std::polar(1.0, -pi * f_hz * dt_s)) < 1e-12 * std::abs(exact));
}

TEST_CASE("Point tables hold every component with its unit", "[point_tables]") {
  const std::vector<PointSeries> points{series_of({1.0, 0.0}), series_of({0.5})};
  const Table peaks = peak_table(points, dt_s);
  REQUIRE(peaks.rows.size() == 12);
  CHECK(std::get<std::string>(peaks.rows[0][4]) == "Ex");
  CHECK(std::get<std::string>(peaks.rows[0][6]) == "V/m");
  CHECK(std::get<std::string>(peaks.rows[11][6]) == "A/m");
  const Table rows = spectrum_rows(points, dt_s, {1e9, 2e9});
  REQUIRE(rows.rows.size() == 24);
  CHECK(std::get<double>(rows.rows[0][6]) == Approx(dt_s));
  CHECK(std::get<double>(rows.rows[0][8]) == Approx(0.0).margin(1e-12));
  const Table one = spectrum_table(points[1], dt_s, {1e9});
  REQUIRE(one.rows.size() == 1);
  REQUIRE(one.columns.size() == 7);
  CHECK(std::get<double>(one.rows[0][1]) == Approx(0.5 * dt_s));
}
