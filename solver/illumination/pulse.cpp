#include "solver/illumination/pulse.hpp"

#include <algorithm>
#include <array>
#include <cmath>

#include "geometry/constants.hpp"

namespace wanewall {
namespace {

using Complex = std::complex<double>;

double rad(double hz) {
  return 2.0 * pi * hz;
}

/// Exact transform of the straight lines between samples: each piece about its midpoint.
Complex spectrum_of_samples(const Pulse& pulse, Complex omega) {
  Complex sum = 0.0;
  for (std::size_t n = 0; n + 1 < pulse.sample_time_s.size(); ++n) {
    const double a = pulse.sample_time_s[n], b = pulse.sample_time_s[n + 1];
    const double h = b - a, middle = 0.5 * (a + b);
    const double mean = 0.5 * (pulse.sample_value[n] + pulse.sample_value[n + 1]);
    const double slope = (pulse.sample_value[n + 1] - pulse.sample_value[n]) / h;
    const Complex x = 0.5 * h * omega;
    const bool small = std::abs(x) < 1e-2;
    const Complex x2 = x * x;
    const Complex even = small ? 1.0 - x2 / 6.0 + x2 * x2 / 120.0 : std::sin(x) / x;
    const Complex odd =
        small ? x / 3.0 - x * x2 / 30.0 + x * x2 * x2 / 840.0 : (std::sin(x) - x * std::cos(x)) / x2;
    sum += std::exp(Complex(0.0, -1.0) * omega * middle) *
           (mean * h * even - Complex(0.0, 1.0) * slope * 0.5 * h * h * odd);
  }
  return sum;
}

/// Frequencies beyond which nothing of the pulse is left.
double scan_end_hz(const Pulse& pulse) {
  if (pulse.kind == Pulse::Kind::samples) {
    double shortest = pulse.sample_time_s[1] - pulse.sample_time_s[0];
    for (std::size_t n = 1; n + 1 < pulse.sample_time_s.size(); ++n)
      shortest = std::min(shortest, pulse.sample_time_s[n + 1] - pulse.sample_time_s[n]);
    return 0.5 / shortest;
  }
  const double centre = pulse.kind == Pulse::Kind::modulated_gaussian ? pulse.centre_hz : 0.0;
  return centre + 10.0 / (2.0 * pi * pulse.width_s);
}

constexpr int scan_points = 2000;

}  // namespace

std::string_view name_of(Pulse::Kind kind) {
  constexpr std::array<std::string_view, 5> names{"modulated_gaussian", "gaussian", "differentiated_gaussian",
                                                  "ricker", "samples"};
  return names[static_cast<std::size_t>(kind)];
}

Pulse modulated_gaussian_for_band(double lo_hz, double hi_hz) {
  constexpr double edge_db = -12.0;
  Pulse pulse;
  pulse.kind = Pulse::Kind::modulated_gaussian;
  pulse.centre_hz = 0.5 * (lo_hz + hi_hz);
  const double half_band = rad(0.5 * (hi_hz - lo_hz));
  pulse.width_s = std::sqrt(-2.0 * std::log(std::pow(10.0, edge_db / 20.0))) / half_band;
  pulse.delay_s = pulse_start_in_widths * pulse.width_s;
  return pulse;
}

double value(const Pulse& pulse, double t_s) {
  if (pulse.kind == Pulse::Kind::samples) {
    const auto& t = pulse.sample_time_s;
    if (t.empty() || t_s < t.front() || t_s > t.back()) return 0.0;
    const auto above = std::upper_bound(t.begin(), t.end(), t_s);
    if (above == t.end()) return pulse.sample_value.back();
    const auto n = static_cast<std::size_t>(above - t.begin());
    const double u = (t_s - t[n - 1]) / (t[n] - t[n - 1]);
    return (1.0 - u) * pulse.sample_value[n - 1] + u * pulse.sample_value[n];
  }
  const double u = (t_s - pulse.delay_s) / pulse.width_s;
  const double bell = std::exp(-0.5 * u * u);
  switch (pulse.kind) {
    case Pulse::Kind::modulated_gaussian:
      return bell * std::sin(rad(pulse.centre_hz) * (t_s - pulse.delay_s));
    case Pulse::Kind::gaussian:
      return bell;
    case Pulse::Kind::differentiated_gaussian:
      return -u * std::exp(0.5) * bell;
    case Pulse::Kind::ricker:
      return (1.0 - u * u) * bell;
    case Pulse::Kind::samples:
      break;
  }
  return 0.0;
}

std::complex<double> spectrum(const Pulse& pulse, std::complex<double> omega) {
  if (pulse.kind == Pulse::Kind::samples) return spectrum_of_samples(pulse, omega);
  const Complex j(0.0, 1.0);
  const double tau = pulse.width_s;
  const Complex shifted = tau * std::sqrt(2.0 * pi) * std::exp(-j * omega * pulse.delay_s);
  const auto bell = [&](Complex w) { return std::exp(-0.5 * tau * tau * w * w); };
  switch (pulse.kind) {
    case Pulse::Kind::modulated_gaussian: {
      const double centre = rad(pulse.centre_hz);
      return shifted * (-0.5 * j) * (bell(omega - centre) - bell(omega + centre));
    }
    case Pulse::Kind::gaussian:
      return shifted * bell(omega);
    case Pulse::Kind::differentiated_gaussian:
      return shifted * j * omega * tau * std::exp(0.5) * bell(omega);
    case Pulse::Kind::ricker:
      return shifted * tau * tau * omega * omega * bell(omega);
    case Pulse::Kind::samples:
      break;
  }
  return 0.0;
}

double spectrum_peak_s(const Pulse& pulse) {
  const double end = scan_end_hz(pulse);
  double peak = 0.0;
  for (int n = 0; n <= scan_points; ++n)
    peak = std::max(peak, std::abs(spectrum(pulse, rad(end * n / scan_points))));
  return peak;
}

double spectrum_end_hz(const Pulse& pulse, double level) {
  const double end = scan_end_hz(pulse);
  const double wanted = level * spectrum_peak_s(pulse);
  for (int n = scan_points; n > 0; --n) {
    if (std::abs(spectrum(pulse, rad(end * n / scan_points))) >= wanted) return end * n / scan_points;
  }
  return 0.0;
}

double end_of_pulse_s(const Pulse& pulse) {
  if (pulse.kind == Pulse::Kind::samples)
    return pulse.sample_time_s.empty() ? 0.0 : pulse.sample_time_s.back();
  return pulse.delay_s + pulse_start_in_widths * pulse.width_s;
}

}  // namespace wanewall
