// Interpolation in recorded snapshots against functions that are known exactly.
#include <catch2/catch.hpp>
#include <cmath>
#include <functional>
#include <stdexcept>

#include "geometry/constants.hpp"
#include "postproc/near_field.hpp"
#include "postproc/near_field_tables.hpp"

using namespace wanewall;

namespace {

using Field = std::function<double(const Vec3&, double)>;

/// Samples a function of place and time on given points, as a record would.
RecordedField sampled(const Field& f, const std::array<std::vector<double>, 3>& points_m,
                      const std::vector<double>& times_s) {
  RecordedField field;
  field.component = Component::ey;
  field.positions_m = points_m;
  field.times_s = times_s;
  for (std::size_t n = 0; n < times_s.size(); ++n) field.steps.push_back(static_cast<long>(10 * n));
  field.load = [f, points_m, times_s](std::size_t which, const Index3& begin, const Index3& end) {
    std::vector<double> values;
    for (int i = begin[0]; i < end[0]; ++i)
      for (int j = begin[1]; j < end[1]; ++j)
        for (int k = begin[2]; k < end[2]; ++k)
          values.push_back(
              f({points_m[0].at(static_cast<std::size_t>(i)), points_m[1].at(static_cast<std::size_t>(j)),
                 points_m[2].at(static_cast<std::size_t>(k))},
                times_s.at(which)));
    return values;
  };
  return field;
}

std::vector<double> even(double first, double spacing, int n) {
  std::vector<double> points;
  for (int i = 0; i < n; ++i) points.push_back(first + i * spacing);
  return points;
}

double power(double x, int n) {
  return n == 0 ? 1.0 : x * power(x, n - 1);
}

/// Largest error over many points of a plane wave of wavelength 1 m sampled `per_wavelength` times along each
/// axis.
double plane_wave_error(int per_wavelength, Interpolation interpolation) {
  const double h = 1.0 / per_wavelength;
  const Field wave = [](const Vec3& p, double) {
    return std::sin(2.0 * pi * (0.48 * p[0] + 0.6 * p[1] + 0.64 * p[2]));  // 0.48^2 + 0.6^2 + 0.64^2 = 1
  };
  const std::vector<double> points = even(-h, h, per_wavelength + 3);
  const RecordedField field = sampled(wave, {points, points, points}, {0.0});
  double largest = 0.0;
  for (int n = 0; n < 300; ++n) {
    const Vec3 p{std::fmod(0.1 + 0.7548776662 * n, 1.0), std::fmod(0.2 + 0.5698402910 * n, 1.0),
                 std::fmod(0.3 + 0.6180339887 * n, 1.0)};
    largest =
        std::max(largest, std::abs(series_at(field, p, interpolation).value().values.at(0) - wave(p, 0.0)));
  }
  return largest;
}

}  // namespace

TEST_CASE("Polynomials of the stated degree are reproduced to rounding", "[near_field]") {
  const auto interpolation = GENERATE(Interpolation::linear, Interpolation::cubic);
  const int degree = interpolation == Interpolation::linear ? 1 : 3;
  // Uneven points on purpose.
  const std::array<std::vector<double>, 3> points_m{
      {{-0.3, -0.1, 0.0, 0.25, 0.4, 0.6}, {1.0, 1.1, 1.3, 1.35}, {-2.0, -1.9, -1.7, -1.5, -1.45}}};
  for (int a = 0; a <= degree; ++a)
    for (int b = 0; b <= degree; ++b)
      for (int c = 0; c <= degree; ++c) {
        const Field f = [&](const Vec3& p, double t) {
          return (1.0 + t) * power(p[0], a) * power(p[1], b) * power(p[2], c);
        };
        const RecordedField field = sampled(f, points_m, {0.0, 1.0});
        // Inside, in the first and last interval, on a point, on the very edges.
        for (const Vec3& p : {Vec3{0.1, 1.2, -1.6}, Vec3{-0.29, 1.01, -1.98}, Vec3{0.59, 1.34, -1.46},
                              Vec3{0.25, 1.1, -1.7}, Vec3{-0.3, 1.0, -2.0}, Vec3{0.6, 1.35, -1.45}}) {
          const FieldSeries series = series_at(field, p, interpolation).value();
          CHECK(series.degree == std::array<int, 3>{degree, degree, degree});
          CHECK(series.values.at(0) == Approx(f(p, 0.0)).margin(1e-13));
          CHECK(series.values.at(1) == Approx(f(p, 1.0)).margin(1e-13));
        }
      }
}

TEST_CASE("A plane wave converges at the stated order", "[near_field][convergence]") {
  const auto interpolation = GENERATE(Interpolation::linear, Interpolation::cubic);
  const double order = std::log2(plane_wave_error(16, interpolation) / plane_wave_error(32, interpolation));
  CHECK(order == Approx(interpolation == Interpolation::linear ? 2.0 : 4.0).margin(0.15));
}

TEST_CASE("Cubic falls back to linear on axes with fewer than four points, and says so", "[near_field]") {
  const Field f = [](const Vec3& p, double) { return power(p[0], 3) * p[1]; };
  const RecordedField field = sampled(f, {even(0.0, 0.1, 4), even(0.0, 0.1, 3), {0.5}}, {0.0});
  const FieldSeries series = series_at(field, {0.17, 0.13, 0.5}, Interpolation::cubic).value();
  CHECK(series.degree == std::array<int, 3>{3, 1, 0});
  CHECK(series.values.at(0) == Approx(f({0.17, 0.13, 0.5}, 0.0)).epsilon(1e-12));
  CHECK(interpolation_text(3) == "cubic");
  CHECK(interpolation_text(1) == "linear");
  CHECK(interpolation_text(0) == "on the plane");
}

TEST_CASE("Points outside are refused; a millionth of a spacing is not outside", "[near_field]") {
  const Field f = [](const Vec3& p, double) { return p[0]; };
  const RecordedField field = sampled(f, {even(0.0, 0.1, 4), even(0.0, 0.1, 4), {0.5}}, {0.0});
  const auto holds = [&](const Vec3& p) { return series_at(field, p, Interpolation::linear).has_value(); };
  CHECK(holds({0.0, 0.3, 0.5}));
  CHECK(holds({-0.5e-7, 0.3 + 0.5e-7, 0.5 + 0.5e-7}));
  CHECK_FALSE(holds({-2e-7, 0.1, 0.5}));
  CHECK_FALSE(holds({0.1, 0.3 + 2e-7, 0.5}));
  CHECK_FALSE(holds({0.1, 0.1, 0.5 + 2e-7}));
  CHECK_FALSE(holds({std::nan(""), 0.1, 0.5}));
}

TEST_CASE("Only the points that are needed are loaded", "[near_field]") {
  RecordedField field = sampled([](const Vec3&, double) { return 1.0; },
                                {even(0.0, 1.0, 9), even(0.0, 1.0, 9), even(0.0, 1.0, 9)}, {0.0});
  Index3 begin{}, end{};
  const auto load = field.load;
  field.load = [&](std::size_t which, const Index3& b, const Index3& e) {
    begin = b;
    end = e;
    return load(which, b, e);
  };
  series_at(field, {4.5, 0.5, 7.5}, Interpolation::linear);
  CHECK(begin == Index3{4, 0, 7});
  CHECK(end == Index3{6, 2, 9});
  series_at(field, {4.5, 0.5, 7.5}, Interpolation::cubic);
  CHECK(begin == Index3{3, 0, 5});
  CHECK(end == Index3{7, 4, 9});
}

TEST_CASE("The box of a snapshot is where all its components are", "[near_field]") {
  const Field f = [](const Vec3&, double) { return 0.0; };
  const std::vector<RecordedField> fields{sampled(f, {even(0.0, 1.0, 5), even(0.5, 1.0, 4), {2.0}}, {0.0}),
                                          sampled(f, {even(0.5, 1.0, 4), even(0.0, 1.0, 5), {2.0}}, {0.0})};
  const Extent common = common_extent(fields);
  CHECK(common.lo_m == Vec3{0.5, 0.5, 2.0});
  CHECK(common.hi_m == Vec3{3.5, 3.5, 2.0});
}

TEST_CASE("The spectrum of a Gaussian is the exact one", "[near_field]") {
  // Fourier transform of exp(-(t - d)^2 / (2 w^2)): w sqrt(2 pi) exp(-omega^2 w^2 / 2 - j omega d). A.
  // Papoulis, The Fourier Integral and Its Applications (McGraw-Hill 1962), from memory. Sums over a whole
  // smooth pulse are exact to far below rounding at this sampling.
  const double width_s = 0.2e-9, delay_s = 1.7e-9, spacing_s = 0.05e-9;
  FieldSeries series;
  for (int n = 0; n < 80; ++n) {
    series.times_s.push_back(0.5 * spacing_s +
                             n * spacing_s);  // a component's own times need not start at zero
    series.values.push_back(std::exp(-0.5 * power((series.times_s.back() - delay_s) / width_s, 2)));
  }
  CHECK(sample_spacing_s(series) == Approx(spacing_s).epsilon(1e-12));
  for (const double frequency_hz : {0.0, 0.3e9, 1.0e9, 1.6e9}) {
    const double omega = 2.0 * pi * frequency_hz;
    const std::complex<double> exact = width_s * std::sqrt(2.0 * pi) *
                                       std::exp(-0.5 * power(omega * width_s, 2)) *
                                       std::polar(1.0, -omega * delay_s);
    CHECK(std::abs(spectrum_at(series, frequency_hz) - exact) < 1e-12 * width_s);
  }
}

TEST_CASE("A spectrum needs at least two evenly spaced steps", "[near_field]") {
  FieldSeries series;
  series.times_s = {1.0};
  series.values = {1.0};
  CHECK_THROWS_WITH(sample_spacing_s(series), Catch::Contains("at least two"));
  series.times_s = {1.0, 2.0, 4.0};
  series.values = {1.0, 1.0, 1.0};
  CHECK_THROWS_WITH(spectrum_at(series, 0.1), Catch::Contains("evenly spaced"));
}

TEST_CASE("The tables of a point hold its series, peaks and spectrum", "[near_field]") {
  FieldSeries e{Component::ez, {1, 1, 0}, {0, 10, 20}, {0.0, 1e-9, 2e-9}, {0.0, -4.0, 0.4}};
  FieldSeries h{Component::hx, {3, 1, 0}, {10, 20}, {1.5e-9, 2.5e-9}, {0.25, 0.5}};
  const Table series = probe_series_table({e, h});
  REQUIRE(series.columns.size() == 5);
  CHECK(series.columns[2].unit == "V/m");
  CHECK(series.columns[4].unit == "A/m");
  CHECK(to_csv(series) ==
        "step,time of E [ns],Ez [V/m],time of H [ns],Hx [A/m]\n"
        "0,0,0,,\n"
        "10,1,-4,1.5,0.25\n"
        "20,2,0.4,2.5,0.5\n");
  CHECK(to_csv(probe_peak_table({e, h})) ==
        "field,peak,unit,at [ns],last over peak [dB]\n"
        "Ez,-4,V/m,1,-20\n"
        "Hx,0.5,A/m,2.5,0\n");
  CHECK(to_csv(interpolation_table({e, h})) ==
        "field,along x,along y,along z\n"
        "Ez,linear,linear,on the plane\n"
        "Hx,cubic,linear,on the plane\n");
  const Table spectrum = probe_spectrum_table({e}, {0.0, 0.25e9});
  REQUIRE(spectrum.rows.size() == 2);
  CHECK(std::get<double>(spectrum.rows[0][1]) == Approx(3.6e-9));  // 1 ns (0 - 4 + 0.4)
  CHECK(std::get<double>(spectrum.rows[0][2]) == Approx(180.0));
  // At a quarter of the sampling rate the samples turn by -90 degrees: 1 ns (4j - 0.4).
  CHECK(std::get<double>(spectrum.rows[1][1]) == Approx(1e-9 * std::sqrt(16.16)));
  CHECK(std::get<double>(spectrum.rows[1][2]) == Approx(std::atan2(4.0, -0.4) * 180.0 / pi));

  h.component = Component::ex;
  CHECK_THROWS_AS(probe_series_table({e, h}), std::invalid_argument);
}
