// Waveforms against their spectra: the transform is checked by quadrature, not by the formula that made it.
#include <catch2/catch.hpp>

#include "geometry/constants.hpp"
#include "solver/illumination/pulse.hpp"

using namespace wanewall;
using Complex = std::complex<double>;

namespace {

Complex quadrature(const Pulse& pulse, Complex omega) {
  // The trapezoidal rule converges faster than any power for these pulses.
  const double end = end_of_pulse_s(pulse), step = end / 20000;
  Complex sum = 0.0;
  for (int n = 0; n <= 20000; ++n)
    sum += value(pulse, n * step) * std::exp(Complex(0, -1) * omega * (n * step));
  return sum * step;
}

Pulse analytic(Pulse::Kind kind) {
  Pulse pulse;
  pulse.kind = kind;
  pulse.centre_hz = 2e9;
  pulse.width_s = 0.2e-9;
  pulse.delay_s = pulse_start_in_widths * pulse.width_s;
  return pulse;
}

}  // namespace

TEST_CASE("Spectra equal the quadrature of the waveform, on the real axis and off it", "[pulse]") {
  const auto kind = GENERATE(Pulse::Kind::modulated_gaussian, Pulse::Kind::gaussian,
                             Pulse::Kind::differentiated_gaussian, Pulse::Kind::ricker);
  const Pulse pulse = analytic(kind);
  const double peak = spectrum_peak_s(pulse);
  for (double hz : {0.0, 0.4e9, 1.1e9, 2.0e9, 3.3e9})
    for (double shift : {0.0, -3e7}) {
      const Complex omega(2 * pi * hz, shift);
      CAPTURE(name_of(kind), hz, shift);
      CHECK(std::abs(spectrum(pulse, omega) - quadrature(pulse, omega)) < 1e-9 * peak);
    }
}

TEST_CASE("Pulses have unit peak", "[pulse]") {
  for (auto kind : {Pulse::Kind::gaussian, Pulse::Kind::differentiated_gaussian, Pulse::Kind::ricker}) {
    const Pulse pulse = analytic(kind);
    double peak = 0.0;
    for (int n = 0; n < 28000; ++n) peak = std::max(peak, std::abs(value(pulse, n * 1e-13)));
    CHECK(peak == Approx(1.0).epsilon(1e-4));
  }
}

TEST_CASE("A pulse fitted to a band is 12 dB down at both ends and has no mean", "[pulse]") {
  const Pulse pulse = modulated_gaussian_for_band(0.4e9, 1.6e9);
  const double peak = spectrum_peak_s(pulse);
  for (double hz : {0.4e9, 1.6e9})
    CHECK(20 * std::log10(std::abs(spectrum(pulse, 2 * pi * hz)) / peak) == Approx(-12.0).margin(0.1));
  CHECK(std::abs(spectrum(pulse, 0.0)) < 1e-12 * peak);
  CHECK(std::abs(value(pulse, 0.0)) < 1e-10);
  CHECK(spectrum_end_hz(pulse, 1e-8) > 1.6e9);
  CHECK(std::abs(spectrum(pulse, 2 * pi * 1.01 * spectrum_end_hz(pulse, 1e-8))) < 1e-8 * peak);
}

TEST_CASE("Samples are joined by straight lines and transformed exactly", "[pulse]") {
  Pulse pulse;
  pulse.kind = Pulse::Kind::samples;
  pulse.sample_time_s = {0.0, 1e-9, 1.5e-9, 4e-9};
  pulse.sample_value = {0.0, 1.0, -0.5, 0.0};
  CHECK(value(pulse, 0.5e-9) == Approx(0.5));
  CHECK(value(pulse, 1.25e-9) == Approx(0.25));
  CHECK(value(pulse, -1e-12) == 0.0);
  CHECK(value(pulse, 4.1e-9) == 0.0);
  const double peak = spectrum_peak_s(pulse);
  for (double hz : {0.0, 1e5, 1e7, 0.3e9, 2.7e9}) {
    const Complex omega = 2 * pi * hz;
    CAPTURE(hz);
    CHECK(std::abs(spectrum(pulse, omega) - quadrature(pulse, omega)) < 1e-6 * peak);
  }
}
