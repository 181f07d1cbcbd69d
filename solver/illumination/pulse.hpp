// Waveforms with unit peak, and their spectra.
#pragma once

#include <complex>
#include <string_view>
#include <vector>

namespace wanewall {

/// With u = (t - delay) / width:
///   modulated_gaussian        exp(-u^2/2) sin(2 pi centre (t - delay))      no mean
///   gaussian                  exp(-u^2/2)                                   has a mean
///   differentiated_gaussian   -u exp((1 - u^2)/2)                           no mean
///   ricker                    (1 - u^2) exp(-u^2/2)                         no mean
///   samples                   straight lines between the samples, zero outside
struct Pulse {
  enum class Kind { modulated_gaussian, gaussian, differentiated_gaussian, ricker, samples };
  Kind kind = Kind::modulated_gaussian;
  double centre_hz = 0.0;  ///< modulated_gaussian only
  double width_s = 0.0;
  double delay_s = 0.0;
  std::vector<double> sample_time_s;  ///< strictly increasing
  std::vector<double> sample_value;
};
std::string_view name_of(Pulse::Kind kind);

/// The delay, in widths, at which a pulse of the analytic kinds starts: exp(-7^2/2) is -213 dB.
inline constexpr double pulse_start_in_widths = 7.0;

/// A modulated Gaussian whose spectrum is 12 dB below its peak at both ends of the band. 0 < lo < hi [Hz].
Pulse modulated_gaussian_for_band(double lo_hz, double hi_hz);

double value(const Pulse& pulse, double t_s);

/// S(omega) = integral f(t) exp(-j omega t) dt  [s]; omega may be complex (a shifted contour).
std::complex<double> spectrum(const Pulse& pulse, std::complex<double> omega_rad_per_s);

/// Largest |S| over all frequencies, and the highest frequency at which |S| is still `level` times that.
double spectrum_peak_s(const Pulse& pulse);
double spectrum_end_hz(const Pulse& pulse, double level);

/// Time after which the waveform stays zero (below -213 dB for the analytic kinds).
double end_of_pulse_s(const Pulse& pulse);

}  // namespace wanewall
