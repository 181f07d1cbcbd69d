#include <algorithm>
#include <array>
#include <cmath>
#include <complex>
#include <string>
#include <unsupported/Eigen/FFT>

#include "geometry/constants.hpp"
#include "solver/illumination/incident_wave.hpp"
#include "solver/table_kernels.hpp"

namespace wanewall {
namespace {

using Complex = std::complex<double>;

constexpr int taps = table_taps;
constexpr double spectrum_floor = 1e-12;  // relative; bins below it are left out
constexpr double quiet_level = 1e-13;     // of the peak; where all is below, nothing is added
constexpr double slack_cells = 60.0;      // the lattice's slowest waves trail behind

class HomogeneousWave : public IncidentWave {
 public:
  HomogeneousWave(const Lattice& lattice, const PlaneWave& wave, const WaveMedium& medium);

  bool is_active(long step) const override { return time_of_e_s(step, dt_s_) < end_s_; }
  void hold(int n_slots) override;
  int n_parts() const override { return 6; }
  void prepare(long step, int slot, int part) override;
  IndexRange row(int slot, Component c, int i, int j, int k, int count, double* out) const override {
    return line(slot, c, {i, j, k}, Axis::z, count, out);
  }
  IndexRange line_y(int slot, Component c, int i, int j, int k, int count, double* out) const override {
    return line(slot, c, {i, j, k}, Axis::y, count, out);
  }

 private:
  /// A component along the direction of travel at one step.
  struct Table {
    std::vector<double> value;  // at origin + m step, with room for the taps at both ends
    double quiet_below = 0.0;   // positions in the table outside which nothing is left of the pulse
    double quiet_above = 0.0;
  };
  using Tables = std::array<Table, 6>;  // by component

  IndexRange line(int slot, Component c, Index3 at, Axis along, int count, double* out) const;
  Lattice lattice_;
  double dt_s_;
  Vec3 direction_{};
  // Positions in a component's table: origin_ + sum over the axes of index * step_.
  std::array<double, 6> origin_{};
  Vec3 step_{};
  double table_origin_m_ = 0.0, table_step_m_ = 0.0;
  std::size_t table_size_ = 0, period_ = 0;
  SampleTable sample_ = sample_table(best_vector_code());
  double end_s_ = 0.0;
  double heard_above_ = 0.0;  // smaller fields are left out
  std::vector<double> omega_;
  std::vector<double> wavenumber_;
  std::array<std::vector<Complex>, 6> amplitude_;  // [component][wavenumber]
  std::vector<Tables> slots_;
};

HomogeneousWave::HomogeneousWave(const Lattice& lattice, const PlaneWave& wave, const WaveMedium& medium)
    : lattice_(lattice), dt_s_(lattice.dt_s), direction_(propagation_of(wave)) {
  const double index = std::sqrt(medium.permittivity_rel * medium.permeability_rel);
  const double speed = c0_m_per_s / index;
  Vec3 cell{}, corner_m{};
  double path_m = 0.0;
  for (Axis axis : all_axes) {
    const auto a = static_cast<std::size_t>(index_of(axis));
    if (!lattice.along(axis).is_uniform() && direction_[a] != 0.0)
      throw ProblemError("plane wave: mesh lines along " + std::string(name_of(axis)) +
                         " must be evenly spaced where the wave travels along them");
    cell[a] = lattice.along(axis).cell_m(0);
    const double lo = lattice.along(axis).node_m(wave.box_lo[a]),
                 hi = lattice.along(axis).node_m(wave.box_hi[a]);
    corner_m[a] = direction_[a] >= 0.0 ? lo : hi;  // the corner that the wave meets first
    path_m += std::abs(direction_[a]) * (hi - lo + cell[a]);
  }
  const double smallest = *std::min_element(cell.begin(), cell.end());
  const double largest = *std::max_element(cell.begin(), cell.end());
  const double pulse_m = end_of_pulse_s(wave.pulse) * speed;
  const double needed_m = path_m + pulse_m + slack_cells * largest;
  end_s_ = (path_m + pulse_m + 0.5 * slack_cells * largest) / speed;

  table_step_m_ = 0.25 * smallest;
  period_ = 64;
  while (static_cast<double>(period_) * table_step_m_ < needed_m) period_ *= 2;
  const double period_m = static_cast<double>(period_) * table_step_m_;
  table_origin_m_ = -2.0 * largest - (taps + 2) * table_step_m_;
  table_size_ = static_cast<std::size_t>(std::ceil((path_m + 4.0 * largest) / table_step_m_)) + 3 * taps;
  table_size_ = std::min(table_size_, period_);
  for (std::size_t a = 0; a < 3; ++a) step_[a] = direction_[a] * cell[a] / table_step_m_;
  for (Component c : all_components) {
    const Vec3 first_m = lattice.position_m(c, {0, 0, 0});
    double along_m = 0.0;
    for (std::size_t a = 0; a < 3; ++a) along_m += direction_[a] * (first_m[a] - corner_m[a]);
    origin_[static_cast<std::size_t>(index_of(c))] = (along_m - table_origin_m_) / table_step_m_;
  }

  heard_above_ = quiet_level * wave.peak_v_per_m;
  const Vec3 e_hat = e_direction_of(wave);
  const double peak = spectrum_peak_s(wave.pulse);
  double last_level = 1.0;
  for (std::size_t bin = 0; bin < period_ / 2; ++bin) {
    const double k = 2.0 * pi * static_cast<double>(bin) / period_m;
    Vec3 lattice_k{};
    double k2 = 0.0, group = 0.0;
    bool carried = true;
    for (std::size_t a = 0; a < 3; ++a) {
      const double phase = 0.5 * k * direction_[a] * cell[a];
      carried = carried && std::abs(phase) < 0.5 * pi;
      lattice_k[a] = 2.0 / cell[a] * std::sin(phase);
      k2 += lattice_k[a] * lattice_k[a];
      group += lattice_k[a] * std::cos(phase) * direction_[a];
    }
    const double k_norm = std::sqrt(k2);
    const double s = 0.5 * speed * dt_s_ * k_norm;
    if (!carried || s >= 1.0) break;
    const double omega = 2.0 / dt_s_ * std::asin(s);
    const double omega_per_k = bin == 0 ? speed : speed * group / (k_norm * std::sqrt(1.0 - s * s));
    const Complex at_origin = spectrum(wave.pulse, omega);
    last_level = std::abs(at_origin) / peak;
    Vec3 unit = direction_;
    if (bin > 0)
      for (std::size_t a = 0; a < 3; ++a) unit[a] = lattice_k[a] / k_norm;
    double along = 0.0, norm = 0.0;
    for (std::size_t a = 0; a < 3; ++a) along += unit[a] * e_hat[a];
    Vec3 e{};
    for (std::size_t a = 0; a < 3; ++a) {
      e[a] = e_hat[a] - unit[a] * along;
      norm += e[a] * e[a];
    }
    for (double& component : e) component /= std::sqrt(norm);
    const double admittance = std::sqrt(medium.permittivity_rel / medium.permeability_rel);
    const Complex amplitude =
        wave.peak_v_per_m * at_origin * (bin == 0 ? 0.5 : 1.0) * omega_per_k * 2.0 / period_m;
    omega_.push_back(omega);
    wavenumber_.push_back(k);
    for (std::size_t a = 0; a < 3; ++a) {
      const std::size_t b = (a + 1) % 3, c = (a + 2) % 3;
      amplitude_[a].push_back(amplitude * e[a]);
      amplitude_[3 + a].push_back(amplitude * admittance * (unit[b] * e[c] - unit[c] * e[b]));
    }
  }
  if (last_level > 1e-6)
    throw ProblemError("plane wave: the pulse has " +
                       std::to_string(static_cast<int>(std::lround(20.0 * std::log10(last_level)))) +
                       " dB of its peak at waves shorter than two cells / allowed: below -120 dB there / "
                       "make the cells smaller or the "
                       "pulse's band lower");
  // Drop the bins beyond the last one that matters.
  std::size_t kept = omega_.size();
  while (kept > 1 && std::abs(spectrum(wave.pulse, omega_[kept - 1])) < spectrum_floor * peak) --kept;
  omega_.resize(kept);
  wavenumber_.resize(kept);
  for (std::vector<Complex>& amplitude : amplitude_) {
    amplitude.resize(kept);
    // Phase of the table's first point.
    for (std::size_t n = 0; n < kept; ++n) amplitude[n] *= std::polar(1.0, -wavenumber_[n] * table_origin_m_);
  }
}

void HomogeneousWave::hold(int n_slots) {
  for (std::size_t old = slots_.size(); old < static_cast<std::size_t>(n_slots); ++old) {
    slots_.emplace_back();
    for (Table& table : slots_.back()) table.value.assign(table_size_, 0.0);
  }
}

void HomogeneousWave::prepare(long step, int slot, int part) {
  thread_local Eigen::FFT<double> fft;
  thread_local std::vector<Complex> half_spectrum;
  thread_local std::vector<double> samples;
  fft.SetFlag(Eigen::FFT<double>::HalfSpectrum);
  fft.SetFlag(Eigen::FFT<double>::Unscaled);
  half_spectrum.assign(period_ / 2 + 1, Complex(0.0));
  samples.resize(period_);
  const std::vector<Complex>& amplitude = amplitude_[static_cast<std::size_t>(part)];
  const double t = part < 3 ? time_of_e_s(step, dt_s_) : time_of_h_s(step - 1, dt_s_);
  // Re sum A exp(j omega t) exp(-j k p): a real inverse transform of the conjugates.
  for (std::size_t n = 0; n < omega_.size(); ++n) {
    const Complex term = amplitude[n] * std::polar(1.0, omega_[n] * t);
    half_spectrum[n] = n == 0 ? Complex(term.real(), 0.0) : 0.5 * std::conj(term);
  }
  fft.inv(samples.data(), half_spectrum.data(), static_cast<Eigen::Index>(period_));
  Table& table = slots_[static_cast<std::size_t>(slot)][static_cast<std::size_t>(part)];
  std::copy_n(samples.begin(), table_size_, table.value.begin());
  const auto heard = [&](double v) { return std::abs(v) > heard_above_; };
  const auto first = std::find_if(table.value.begin(), table.value.end(), heard);
  const auto last = std::find_if(table.value.rbegin(), table.value.rend(), heard);
  table.quiet_below = static_cast<double>(first - table.value.begin()) - taps;
  table.quiet_above = static_cast<double>(table.value.rend() - last) + taps;
}

// What a point gets must not depend on where its line begins or ends: positions are counted from the axis's
// index 0, and each point is quiet or not by itself.
IndexRange HomogeneousWave::line(int slot, Component c, Index3 at, Axis along, int count, double* out) const {
  const Table& table = slots_[static_cast<std::size_t>(slot)][static_cast<std::size_t>(index_of(c))];
  const auto a = static_cast<std::size_t>(index_of(along));
  const int begin = at[a];
  at[a] = 0;
  const double step = step_[a];
  const double origin = origin_[static_cast<std::size_t>(index_of(c))] +
                        (at[0] * step_[0] + at[1] * step_[1] + at[2] * step_[2]);
  const auto position = [&](int m) { return origin + (begin + m) * step; };
  // The first and the last point that hear the wave lie where the line meets the ends of the pulse.
  int first = 0, last = count;
  if (step != 0.0) {
    const double enter = ((step > 0.0 ? table.quiet_below : table.quiet_above) - position(0)) / step;
    const double leave = ((step > 0.0 ? table.quiet_above : table.quiet_below) - position(0)) / step;
    first = static_cast<int>(std::clamp(std::floor(enter) - 1.0, 0.0, static_cast<double>(count)));
    last = static_cast<int>(std::clamp(std::ceil(leave) + 2.0, 0.0, static_cast<double>(count)));
  }
  const auto is_quiet = [&](int m) {
    return position(m) < table.quiet_below || position(m) > table.quiet_above;
  };
  while (first < last && is_quiet(first)) ++first;
  while (last > first && is_quiet(last - 1)) --last;
  last = std::max(first, last);
  std::fill(out, out + first, 0.0);
  sample_(table.value.data(), origin, step, begin + first, last - first, out + first);
  std::fill(out + last, out + count, 0.0);
  return {first, last};
}

}  // namespace

std::unique_ptr<IncidentWave> make_homogeneous_wave(const Lattice& lattice, const PlaneWave& wave,
                                                    const WaveMedium& medium) {
  return std::make_unique<HomogeneousWave>(lattice, wave, medium);
}

}  // namespace wanewall
