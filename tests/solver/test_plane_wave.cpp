// The lattice plane wave: it solves the update equations, and an empty box stays empty outside.
#include <catch2/catch.hpp>

#include "tests/solver/setup.hpp"

using namespace wanewall;
using namespace wanewall::test;

namespace {

/// Gaussian-sine with its centre at 20 of the largest cells per wavelength and -40 dB at 10.
Pulse pulse_for(const Lattice& lattice) {
  double largest = 0.0;
  for (Axis a : all_axes) largest = std::max(largest, lattice.along(a).largest_cell_m());
  const double centre = c0_m_per_s / (20.0 * largest);
  Pulse pulse;
  pulse.centre_hz = centre;
  pulse.width_s = 9.66 * largest / c0_m_per_s;
  pulse.delay_s = pulse_start_in_widths * pulse.width_s;
  return pulse;
}

struct Leak {
  double e_db, h_db;
};

/// Largest field outside a total-field box of `size` cells in an empty lattice, relative to the incident
/// peak.
template <class Real>
Leak leakage(Problem problem, int size, int margin, int steps) {
  PlaneWave& wave = *problem.plane_wave;
  wave.box_lo = {margin, margin, margin};
  wave.box_hi = {margin + size, margin + size, margin + size};
  Marcher<Real> marcher(problem, 2);
  double outside[2]{};
  for (int n = 0; n < steps; n += 15) {
    marcher.advance(15, {});
    for (Component c : all_components) {
      const auto in = [&](Axis a, int index) {
        const auto at = static_cast<std::size_t>(index_of(a));
        return index >= wave.box_lo[at] && index < wave.box_hi[at] + (is_half(c, a) ? 0 : 1);
      };
      for (int i = 0; i < problem.lattice.stored(c, Axis::x).end; ++i)
        for (int j = 0; j < problem.lattice.stored(c, Axis::y).end; ++j)
          for (int k = 0; k < problem.lattice.stored(c, Axis::z).end; ++k) {
            if (in(Axis::x, i) && in(Axis::y, j) && in(Axis::z, k)) continue;
            double& worst = outside[is_electric(c) ? 0 : 1];
            worst = std::max(worst, std::abs(static_cast<double>(marcher.fields().row(c, i, j)[k])));
          }
    }
  }
  return {db(outside[0] / wave.peak_v_per_m), db(outside[1] / wave.peak_v_per_m)};
}

Problem empty_box(Vec3 cell_m, double theta_deg, double phi_deg, double e_angle_deg) {
  constexpr int size = 24, margin = 4;
  Problem problem = vacuum_problem({size + 2 * margin, size + 2 * margin, size + 2 * margin}, cell_m);
  PlaneWave wave;
  wave.theta_rad = degrees(theta_deg);
  wave.phi_rad = degrees(phi_deg);
  wave.e_angle_rad = degrees(e_angle_deg);
  wave.pulse = pulse_for(problem.lattice);
  problem.plane_wave = wave;
  return problem;
}

}  // namespace

TEST_CASE("The plane wave satisfies the six update equations at random places", "[plane_wave]") {
  const Vec3 cell = GENERATE(Vec3{1e-3, 1e-3, 1e-3}, Vec3{1e-3, 1.5e-3, 0.7e-3});
  const double theta = GENERATE(0.0, 30.0, 90.0, 37.3);
  Problem problem = empty_box(cell, theta, 71.9, 45.0);
  problem.plane_wave->box_lo = {4, 4, 4};
  problem.plane_wave->box_hi = {28, 28, 28};
  const Lattice& lattice = problem.lattice;
  // Two steps of the same wave, prepared one after the other.
  const auto now = make_homogeneous_wave(lattice, *problem.plane_wave, {});
  const auto later = make_homogeneous_wave(lattice, *problem.plane_wave, {});
  const long step = std::lround(problem.plane_wave->pulse.delay_s / lattice.dt_s) + 20;
  now->hold(1);
  later->hold(1);
  for (int part = 0; part < now->n_parts(); ++part) {
    now->prepare(step, 0, part);
    later->prepare(step + 1, 0, part);
  }
  // now: E at n, H at n - 1/2; later: E at n + 1, H at n + 1/2.
  const auto sample = [](const IncidentWave& wave, Component c, Index3 at) {
    double out = 0.0;
    wave.row(0, c, at[0], at[1], at[2], 1, &out);
    return out;
  };
  double worst = 0.0, largest = 0.0;
  unsigned seed = 12345;
  const auto random = [&](int n) {
    return static_cast<int>((seed = seed * 1664525u + 1013904223u) >> 16) % n;
  };
  for (int trial = 0; trial < 200; ++trial) {
    const Index3 at{6 + random(20), 6 + random(20), 6 + random(20)};
    for (Axis a : all_axes) {
      const Axis u = next(a), v = previous(a);
      const auto moved = [&](Axis axis, int by) {
        Index3 m = at;
        m[static_cast<std::size_t>(index_of(axis))] += by;
        return m;
      };
      const double du = cell[static_cast<std::size_t>(index_of(u))],
                   dv = cell[static_cast<std::size_t>(index_of(v))];
      const double c_dt = c0_m_per_s * lattice.dt_s;
      const double curl_h =
          (sample(*later, magnetic(v), at) - sample(*later, magnetic(v), moved(u, -1))) / du -
          (sample(*later, magnetic(u), at) - sample(*later, magnetic(u), moved(v, -1))) / dv;
      worst = std::max(
          worst, std::abs(sample(*later, electric(a), at) - sample(*now, electric(a), at) - c_dt * curl_h));
      const double curl_e = (sample(*now, electric(v), moved(u, 1)) - sample(*now, electric(v), at)) / du -
                            (sample(*now, electric(u), moved(v, 1)) - sample(*now, electric(u), at)) / dv;
      worst = std::max(
          worst, std::abs(sample(*later, magnetic(a), at) - sample(*now, magnetic(a), at) + c_dt * curl_e));
      largest = std::max(largest, std::abs(sample(*now, electric(a), at)));
    }
  }
  CAPTURE(theta, worst, largest);
  CHECK(largest > 0.05);
  CHECK(worst < 1e-10);
}

TEST_CASE("An empty box leaks less than -150 dB at any angle", "[plane_wave]") {
  const Vec3 cell = GENERATE(Vec3{1e-3, 1e-3, 1e-3}, Vec3{1e-3, 1.5e-3, 0.7e-3});
  const auto direction = GENERATE(std::pair{0.0, 0.0}, std::pair{30.0, 0.0}, std::pair{45.0, 45.0},
                                  std::pair{37.3, 71.9}, std::pair{90.0, 13.0});
  const double e_angle = GENERATE(0.0, 90.0);
  const Problem problem = empty_box(cell, direction.first, direction.second, e_angle);
  const Leak leak = leakage<double>(problem, 24, 4, 300);
  CAPTURE(direction.first, direction.second, e_angle, cell[1], leak.e_db, leak.h_db);
  CHECK(leak.e_db < -150.0);
  CHECK(leak.h_db < -150.0);
}

TEST_CASE("Inside the surface runs the wave that was asked for", "[plane_wave]") {
  // E along e_direction, delayed from the corner that the wave meets first; the mesh's dispersion is within 5
  // %.
  const double theta = GENERATE(0.0, 40.0, 120.0);
  Problem problem = empty_box({1e-3, 1e-3, 1e-3}, theta, 25.0, 30.0);
  PlaneWave& wave = *problem.plane_wave;
  wave.box_lo = {4, 4, 4};
  wave.box_hi = {28, 28, 28};
  const Vec3 k = propagation_of(wave), e = e_direction_of(wave);
  CHECK(k[2] == Approx(-std::cos(degrees(theta))));
  Marcher<double> marcher(problem, 2);
  double worst = 0.0, largest = 0.0;
  for (long n = 1; n <= 260; ++n) {
    marcher.advance(1, {});
    double delay_m = 0.0;
    const Vec3 at = problem.lattice.position_m(Component::ey, {15, 16, 17});
    for (std::size_t a = 0; a < 3; ++a) delay_m += k[a] * (at[a] - (k[a] >= 0.0 ? 4e-3 : 28e-3));
    const double t = static_cast<double>(n) * problem.lattice.dt_s - delay_m / c0_m_per_s;
    const double expected = e[1] * value(wave.pulse, t);
    worst = std::max(worst, std::abs(marcher.fields().row(Component::ey, 15, 16)[17] - expected));
    largest = std::max(largest, std::abs(expected));
  }
  CAPTURE(theta, worst, largest);
  CHECK(largest > 0.1);
  CHECK(worst < 0.05 * largest);
}
