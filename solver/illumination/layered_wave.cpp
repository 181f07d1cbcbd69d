#include <algorithm>
#include <cmath>
#include <complex>
#include <string>

#include "geometry/constants.hpp"
#include "solver/illumination/incident_wave.hpp"

namespace wanewall {
namespace {

using Complex = std::complex<double>;
const Complex imaginary(0.0, 1.0);

constexpr double spectrum_floor = 1e-12;
constexpr double slack_cells = 60.0;
// exp(-shift) is what is left of a late tail after one period; larger values lift rounding noise instead.
constexpr double contour_shift = 12.0;

/// E at nodes and H at half nodes along the path of the wave, for one frequency, unit down-going wave at the
/// origin.
struct Ladder {
  std::vector<Complex> e;  // [0..m]
  std::vector<Complex> h;  // [0..m], h[n] half a cell behind node n
};

/// March from the far end towards the entry, which is the direction in which errors shrink.
///   Zs H(n+1/2) = -(E(n+1) - E(n))/d,  Yp E(n) = -(H(n+1/2) - H(n-1/2))/d,  beyond the end E(n+1) = lambda
///   E(n)
Ladder solve_ladder(const std::vector<Complex>& yp, const std::vector<Complex>& zs, double d) {
  const std::size_t m = yp.size() - 1;
  const Complex half_trace = 1.0 + 0.5 * d * d * zs[m] * yp[m];
  const Complex root = std::sqrt(half_trace * half_trace - 1.0);
  const Complex lambda_a = half_trace + root, lambda_b = half_trace - root;
  Complex lambda = std::abs(lambda_a) < std::abs(lambda_b) ? lambda_a : lambda_b;
  if (std::abs(std::abs(lambda_a) - std::abs(lambda_b)) < 1e-12 * std::abs(lambda_a))
    lambda = lambda_a.imag() < 0.0 ? lambda_a : lambda_b;
  Ladder ladder{std::vector<Complex>(m + 1), std::vector<Complex>(m + 1)};
  std::vector<double> log_scale(m + 1, 0.0);
  Complex e = 1.0, h = -(lambda - 1.0) / (d * zs[m]);
  double log_now = 0.0;
  for (std::size_t n = m + 1; n-- > 0;) {
    if (n < m) e += d * zs[n] * h;
    ladder.e[n] = e;
    ladder.h[n] = h;
    log_scale[n] = log_now;
    h += d * yp[n] * e;
    const double size = std::abs(e);
    if (size > 1e100) {
      e /= size;
      h /= size;
      log_now += std::log(size);
    }
  }
  // h[n] was stored before the step over node n, so it belongs to n + 1/2.
  for (std::size_t n = 0; n <= m; ++n) {
    const double factor = std::exp(log_scale[n] - log_scale[0]);
    ladder.e[n] *= factor;
    ladder.h[n] *= factor;
  }
  return ladder;
}

class LayeredWave : public IncidentWave {
 public:
  LayeredWave(const Lattice& lattice, const PlaneWave& wave, const WaveMedium& medium,
              const LayeredColumn& column, double end_s);

  bool is_active(long step) const override { return time_of_e_s(step, dt_s_) <= end_s_; }
  void hold(int n_slots) override {
    if (slots_.size() < static_cast<std::size_t>(n_slots)) slots_.resize(static_cast<std::size_t>(n_slots));
  }
  int n_parts() const override { return 2; }
  void prepare(long step, int slot, int part) override;
  IndexRange row(int slot, Component c, int i, int j, int k, int count, double* out) const override;
  IndexRange line_y(int slot, Component c, int i, int j, int k, int count, double* out) const override {
    row(slot, c, i, j, k, 1, out);  // the same everywhere in a plane
    std::fill_n(out, count, out[0]);
    return {0, count};
  }

 private:
  double dt_s_, end_s_;
  int first_k_ = 0, count_ = 0;  // lattice planes k = first_k_ .. first_k_ + count_ - 1 are known
  Vec3 e_direction_{}, h_direction_{};
  std::vector<Complex> omega_;
  std::vector<Complex> e_amplitude_, h_amplitude_;  // [k][frequency]
  struct Tables {
    std::vector<double> e, h;  // [k]; H half a cell above node k
  };
  std::vector<Tables> slots_;
};

LayeredWave::LayeredWave(const Lattice& lattice, const PlaneWave& wave, const WaveMedium& medium,
                         const LayeredColumn& column, double end_s)
    : dt_s_(lattice.dt_s), end_s_(end_s) {
  const MeshLines& z = lattice.along(Axis::z);
  const Vec3 direction = propagation_of(wave);
  const bool downwards = direction[2] < 0.0;
  const double d = z.cell_m(0);
  if (!z.is_uniform()) throw ProblemError("plane wave on layers: mesh lines along z must be evenly spaced");
  const double index = std::sqrt(medium.permittivity_rel * medium.permeability_rel);
  const double speed = c0_m_per_s / index;

  // One plane outside the box at the entry, one behind it: the planes the surface asks for.
  first_k_ = std::max(wave.box_lo[2] - 1, 0);
  const int last_k = std::min(wave.box_hi[2] + 1, z.cells());
  count_ = last_k - first_k_ + 1;
  const auto m = static_cast<std::size_t>(count_) - 1;
  const int entry_k = downwards ? last_k : first_k_;
  const int origin_k = downwards ? wave.box_hi[2] : wave.box_lo[2];
  const int towards = downwards ? -1 : 1;

  e_direction_ = e_direction_of(wave);
  h_direction_ = {-direction[2] * e_direction_[1], direction[2] * e_direction_[0], 0.0};

  const double pulse_m = end_of_pulse_s(wave.pulse) * speed;
  const double period_m = 1.15 * (end_s * speed + pulse_m) + slack_cells * d;
  const double shift = contour_shift / period_m;
  const double peak = spectrum_peak_s(wave.pulse);
  const double last_hz = spectrum_end_hz(wave.pulse, spectrum_floor);
  std::vector<std::vector<Complex>> e_of_bin, h_of_bin;
  for (std::size_t bin = 0;; ++bin) {
    const double real_k = 2.0 * pi * static_cast<double>(bin) / period_m;
    if (real_k * d >= pi || 0.5 * speed * dt_s_ * 2.0 / d * std::sin(0.5 * real_k * d) >= 1.0) {
      if (std::abs(spectrum(wave.pulse, omega_.back().real())) > 1e-6 * peak)
        throw ProblemError(
            "plane wave on layers: the pulse reaches waves shorter than two cells / make the cells smaller "
            "or the "
            "pulse's band lower");
      break;
    }
    const Complex k(real_k, -shift);
    const Complex phase = 0.5 * k * d;
    const Complex lattice_k = 2.0 / d * std::sin(phase);
    const Complex s = 0.5 * speed * dt_s_ * lattice_k;
    const Complex omega = 2.0 / dt_s_ * std::asin(s);
    if (omega.real() > 2.0 * pi * last_hz) break;
    const Complex omega_per_k = speed * std::cos(phase) / std::sqrt(1.0 - s * s);
    const Complex amplitude = wave.peak_v_per_m * spectrum(wave.pulse, omega) * (bin == 0 ? 0.5 : 1.0) *
                              omega_per_k * 2.0 / period_m;

    const Complex half_step = std::exp(0.5 * imaginary * omega * dt_s_);
    const auto admittivity = [&](const UpdateCoefficients& c) {
      return (half_step - c.decay / half_step) / c.gain;
    };
    std::vector<Complex> yp(m + 1), zs(m + 1);
    for (std::size_t n = 0; n <= m; ++n) {
      const int node = entry_k + towards * static_cast<int>(n);
      const int half = downwards ? node - 1 : node;
      yp[n] = admittivity(column.e[static_cast<std::size_t>(node)]);
      // The half node behind the last plane is outside the known range; its medium is that of the one before
      // it.
      const bool known = half >= 0 && half < z.cells();
      zs[n] = admittivity(column.h[static_cast<std::size_t>(known ? half : half - towards)]);
    }
    Ladder ladder = solve_ladder(yp, zs, d);
    // Near the entry E = D exp(-jkn d) + R exp(+jkn d); D is the part that comes in.
    const Complex turn = std::exp(imaginary * k * d);
    const Complex incoming = (ladder.e[1] - ladder.e[0] * turn) / (1.0 / turn - turn);
    const double origin_offset = std::abs(origin_k - entry_k) * d;
    const Complex factor = amplitude * std::exp(imaginary * k * origin_offset) / incoming;
    for (std::size_t n = 0; n <= m; ++n) {
      ladder.e[n] *= factor;
      ladder.h[n] *= factor;
    }
    omega_.push_back(omega);
    e_of_bin.push_back(std::move(ladder.e));
    h_of_bin.push_back(std::move(ladder.h));
  }

  const std::size_t bins = omega_.size();
  e_amplitude_.resize(bins * (m + 1));
  h_amplitude_.assign(bins * (m + 1), Complex(0.0));
  for (std::size_t plane = 0; plane <= m; ++plane) {
    const std::size_t n = downwards ? m - plane : plane;  // steps from the entry to this plane's node
    // H half a cell above node `plane` is half a step further along an upward path, half a step back on a
    // downward one.
    const bool has_h = downwards ? n > 0 : true;
    for (std::size_t bin = 0; bin < bins; ++bin) {
      e_amplitude_[plane * bins + bin] = e_of_bin[bin][n];
      if (has_h) h_amplitude_[plane * bins + bin] = h_of_bin[bin][downwards ? n - 1 : n];
    }
  }
}

void LayeredWave::prepare(long step, int slot, int part) {
  const bool electric_part = part == 0;
  const double t = electric_part ? time_of_e_s(step, dt_s_) : time_of_h_s(step - 1, dt_s_);
  const std::size_t bins = omega_.size();
  std::vector<double> real(bins), imag(bins);
  for (std::size_t bin = 0; bin < bins; ++bin) {
    const Complex phase = std::exp(imaginary * omega_[bin] * t);
    real[bin] = phase.real();
    imag[bin] = phase.imag();
  }
  const std::vector<Complex>& amplitude = electric_part ? e_amplitude_ : h_amplitude_;
  Tables& tables = slots_[static_cast<std::size_t>(slot)];
  std::vector<double>& now = electric_part ? tables.e : tables.h;
  now.resize(static_cast<std::size_t>(count_));
  for (std::size_t plane = 0; plane < now.size(); ++plane) {
    const Complex* a = amplitude.data() + plane * bins;
    double sum = 0.0;
    for (std::size_t bin = 0; bin < bins; ++bin) sum += a[bin].real() * real[bin] - a[bin].imag() * imag[bin];
    now[plane] = sum;
  }
}

IndexRange LayeredWave::row(int slot, Component c, int, int, int k, int count, double* out) const {
  const auto axis = static_cast<std::size_t>(index_of(axis_of(c)));
  const double direction = (is_electric(c) ? e_direction_ : h_direction_)[axis];
  const Tables& tables = slots_[static_cast<std::size_t>(slot)];
  const std::vector<double>& now = is_electric(c) ? tables.e : tables.h;
  for (int n = 0; n < count; ++n)
    out[n] = axis == 2 ? 0.0 : direction * now[static_cast<std::size_t>(k + n - first_k_)];
  return {0, count};
}

}  // namespace

std::unique_ptr<IncidentWave> make_layered_wave(const Lattice& lattice, const PlaneWave& wave,
                                                const WaveMedium& entry_medium, const LayeredColumn& column,
                                                double end_s) {
  return std::make_unique<LayeredWave>(lattice, wave, entry_medium, column, end_s);
}

}  // namespace wanewall
