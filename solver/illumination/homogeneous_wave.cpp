#include <algorithm>
#include <array>
#include <cmath>
#include <complex>
#include <string>
#include <unsupported/Eigen/FFT>

#include "geometry/constants.hpp"
#include "solver/illumination/incident_wave.hpp"

namespace wanewall {
namespace {

using Complex = std::complex<double>;

constexpr int taps = 8;
constexpr double spectrum_floor = 1e-12;  // relative; bins below it are left out
constexpr double slack_cells = 60.0;      // the lattice's slowest waves trail behind

/// Weights of the 8 table points around a position `fraction` of the way between the 4th and the 5th.
std::array<double, taps> lagrange_weights(double fraction) {
  // Product over the other points of (x - x_j)/(x_i - x_j) with x_j = -3..4; denominators are the same every
  // time.
  static constexpr std::array<double, taps> inverse_denominator{
      -1.0 / 5040, 1.0 / 720, -1.0 / 240, 1.0 / 144, -1.0 / 144, 1.0 / 240, -1.0 / 720, 1.0 / 5040};
  std::array<double, taps> x, below, above, weights;
  for (int i = 0; i < taps; ++i) x[static_cast<std::size_t>(i)] = fraction - (i - 3);
  below[0] = above[taps - 1] = 1.0;
  for (std::size_t i = 1; i < taps; ++i) below[i] = below[i - 1] * x[i - 1];
  for (std::size_t i = taps - 1; i > 0; --i) above[i - 1] = above[i] * x[i];
  for (std::size_t i = 0; i < taps; ++i) weights[i] = below[i] * above[i] * inverse_denominator[i];
  return weights;
}

class HomogeneousWave : public IncidentWave {
 public:
  HomogeneousWave(const Lattice& lattice, const PlaneWave& wave, const WaveMedium& medium);

  bool is_active(long step) const override { return time_of_e_s(step, dt_s_) < end_s_; }
  int n_parts() const override { return 6; }
  void prepare(long step, int part) override;
  void row(Component c, int i, int j, int k, int count, double* out) const override;

 private:
  struct Part {
    std::vector<Complex> amplitude;  // per wavenumber, for the component
    std::vector<double> table;       // value at origin + m step, with room for the taps at both ends
    Eigen::FFT<double> fft;
    std::vector<Complex> half_spectrum;
    std::vector<double> samples;
  };

  double along_m(Component c, int i, int j, int k) const {
    double p = 0.0;
    const Vec3 r = lattice_.position_m(c, Index3{i, j, k});
    for (std::size_t a = 0; a < 3; ++a) p += direction_[a] * (r[a] - origin_m_[a]);
    return p;
  }

  Lattice lattice_;
  double dt_s_;
  Vec3 direction_{}, origin_m_{};
  double table_origin_m_ = 0.0, table_step_m_ = 0.0;
  std::size_t table_size_ = 0, period_ = 0;
  int stride_z_ = 0;  // table steps from k to k + 1, signed; valid when whole_stride_
  bool whole_stride_ = false;
  double end_s_ = 0.0;
  std::vector<double> omega_;
  std::vector<double> wavenumber_;
  std::array<Part, 6> parts_;
};

HomogeneousWave::HomogeneousWave(const Lattice& lattice, const PlaneWave& wave, const WaveMedium& medium)
    : lattice_(lattice), dt_s_(lattice.dt_s), direction_(propagation_of(wave)) {
  const double index = std::sqrt(medium.permittivity_rel * medium.permeability_rel);
  const double speed = c0_m_per_s / index;
  Vec3 cell{};
  double path_m = 0.0;
  for (Axis axis : all_axes) {
    const auto a = static_cast<std::size_t>(index_of(axis));
    if (!lattice.along(axis).is_uniform() && direction_[a] != 0.0)
      throw ProblemError("plane wave: mesh lines along " + std::string(name_of(axis)) +
                         " must be evenly spaced where the wave travels along them");
    cell[a] = lattice.along(axis).cell_m(0);
    const double lo = lattice.along(axis).node_m(wave.box_lo[a]),
                 hi = lattice.along(axis).node_m(wave.box_hi[a]);
    origin_m_[a] = direction_[a] >= 0.0 ? lo : hi;  // the corner that the wave meets first
    path_m += std::abs(direction_[a]) * (hi - lo + cell[a]);
  }
  const double smallest = *std::min_element(cell.begin(), cell.end());
  const double largest = *std::max_element(cell.begin(), cell.end());
  const double pulse_m = end_of_pulse_s(wave.pulse) * speed;
  const double needed_m = path_m + pulse_m + slack_cells * largest;
  end_s_ = (path_m + pulse_m + 0.5 * slack_cells * largest) / speed;

  table_step_m_ = 0.25 * smallest;
  const double dz = std::abs(direction_[2]) * cell[2];
  if (dz > 0.25 * table_step_m_) {
    // A whole number of table steps per cell along z: one set of weights then serves a whole row.
    const double steps = std::ceil(dz / table_step_m_ - 1e-9);
    table_step_m_ = dz / steps;
    stride_z_ = static_cast<int>(steps) * (direction_[2] > 0.0 ? 1 : -1);
    whole_stride_ = true;
  }
  period_ = 64;
  while (static_cast<double>(period_) * table_step_m_ < needed_m) period_ *= 2;
  const double period_m = static_cast<double>(period_) * table_step_m_;
  table_origin_m_ = -2.0 * largest - (taps + 2) * table_step_m_;
  table_size_ = static_cast<std::size_t>(std::ceil((path_m + 4.0 * largest) / table_step_m_)) + 3 * taps;
  table_size_ = std::min(table_size_, period_);

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
      parts_[a].amplitude.push_back(amplitude * e[a]);
      parts_[3 + a].amplitude.push_back(amplitude * admittance * (unit[b] * e[c] - unit[c] * e[b]));
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
  for (Part& part : parts_) {
    part.amplitude.resize(kept);
    // Phase of the table's first point.
    for (std::size_t n = 0; n < kept; ++n)
      part.amplitude[n] *= std::polar(1.0, -wavenumber_[n] * table_origin_m_);
    part.fft.SetFlag(Eigen::FFT<double>::HalfSpectrum);
    part.fft.SetFlag(Eigen::FFT<double>::Unscaled);
    part.half_spectrum.assign(period_ / 2 + 1, Complex(0.0));
    part.samples.resize(period_);
    part.table.assign(table_size_, 0.0);
  }
}

void HomogeneousWave::prepare(long step, int part_number) {
  Part& part = parts_[static_cast<std::size_t>(part_number)];
  const double t = part_number < 3 ? time_of_e_s(step, dt_s_) : time_of_h_s(step - 1, dt_s_);
  // Re sum A exp(j omega t) exp(-j k p): a real inverse transform of the conjugates.
  for (std::size_t n = 0; n < omega_.size(); ++n) {
    const Complex term = part.amplitude[n] * std::polar(1.0, omega_[n] * t);
    part.half_spectrum[n] = n == 0 ? Complex(term.real(), 0.0) : 0.5 * std::conj(term);
  }
  part.fft.inv(part.samples.data(), part.half_spectrum.data(), static_cast<Eigen::Index>(period_));
  std::copy_n(part.samples.begin(), table_size_, part.table.begin());
}

void HomogeneousWave::row(Component c, int i, int j, int k, int count, double* out) const {
  const double* table = parts_[static_cast<std::size_t>(index_of(c))].table.data();
  const double first = (along_m(c, i, j, k) - table_origin_m_) / table_step_m_;
  const auto sample = [&](double position) {
    const double whole = std::floor(position);
    const std::array<double, taps> w = lagrange_weights(position - whole);
    const double* at = table + static_cast<std::ptrdiff_t>(whole) - 3;
    double sum = 0.0;
    for (std::size_t n = 0; n < taps; ++n) sum += w[n] * at[n];
    return sum;
  };
  if (count == 1) {
    out[0] = sample(first);
  } else if (direction_[2] == 0.0) {
    std::fill_n(out, count, sample(first));
  } else if (whole_stride_) {
    const double whole = std::floor(first);
    const std::array<double, taps> w = lagrange_weights(first - whole);
    const double* at = table + static_cast<std::ptrdiff_t>(whole) - 3;
    for (int n = 0; n < count; ++n, at += stride_z_) {
      double sum = 0.0;
      for (std::size_t m = 0; m < taps; ++m) sum += w[m] * at[m];
      out[n] = sum;
    }
  } else {
    const double step = direction_[2] * lattice_.along(Axis::z).cell_m(0) / table_step_m_;
    for (int n = 0; n < count; ++n) out[n] = sample(first + n * step);
  }
}

}  // namespace

std::unique_ptr<IncidentWave> make_homogeneous_wave(const Lattice& lattice, const PlaneWave& wave,
                                                    const WaveMedium& medium) {
  return std::make_unique<HomogeneousWave>(lattice, wave, medium);
}

}  // namespace wanewall
