// Dielectric and lossy slabs at normal incidence against the exact transmission-line result.
//   Source of the formula: M. Born and E. Wolf, Principles of Optics, section on stratified media; C. A.
//   Balanis, Advanced Engineering Electromagnetics, ch. 5 (both from memory).
#include <catch2/catch.hpp>
#include <complex>

#include "tests/solver/setup.hpp"

using namespace wanewall;
using namespace wanewall::test;
using Complex = std::complex<double>;

namespace {

struct Slab {
  double permittivity, conductivity, thickness_m;
};

struct Ratios {
  double reflection, transmission;
};

/// One slab in vacuum: impedance eta = eta0/sqrt(eps), phase gamma L.
Ratios exact(const Slab& slab, double hz) {
  const double omega = 2.0 * pi * hz;
  const Complex eps(slab.permittivity, -slab.conductivity / (omega * eps0_f_per_m));
  const Complex n = std::sqrt(eps), gamma_l = Complex(0.0, omega / c0_m_per_s) * n * slab.thickness_m;
  const Complex r = (1.0 - n) / (1.0 + n), once = std::exp(-gamma_l);
  const Complex denominator = 1.0 - r * r * once * once;
  return {std::abs(r * (1.0 - once * once) / denominator), std::abs((1.0 - r * r) * once / denominator)};
}

constexpr int n_frequencies = 7;

struct Bands {
  std::array<Ratios, n_frequencies> measured, expected;
};

/// A pulse from a current sheet on the left through a slab in the middle of a long column; with and without
/// slab.
Bands run_slab(const Slab& slab, double highest_hz, double cells_per_wavelength) {
  const double index = std::sqrt(slab.permittivity);
  double cell = c0_m_per_s / (highest_hz * index * cells_per_wavelength);
  const int slab_cells = std::max(1, static_cast<int>(std::lround(slab.thickness_m / cell)));
  cell = slab.thickness_m / slab_cells;
  const Pulse pulse = modulated_gaussian_for_band(0.3 * highest_hz, highest_hz);
  const double pulse_s = 2.0 * pulse.delay_s;
  const int pulse_cells = static_cast<int>(pulse_s * c0_m_per_s / cell);
  // Long enough that no wall is heard before the slab has rung down (40 passes through it).
  const int ring = static_cast<int>(40.0 * slab_cells * index);
  const int reach = (pulse_cells + ring) / 2 + 60;
  const int source = reach, front = reach + 20, back = front + slab_cells, cells = back + reach;
  const auto run_once = [&](bool with_slab) {
    Problem p = vacuum_problem({1, 1, cells}, {cell, cell, cell});
    set_periodic(p, Axis::x);
    set_periodic(p, Axis::y);
    set_courant(p, 0.9);
    if (with_slab) {
      p.media.push_back({"slab", slab.permittivity, 1.0, slab.conductivity, 0.0, false, false});
      p.objects.push_back({Layer{Axis::z, front * cell, back * cell}, 1, "slab"});
    }
    p.dipoles.push_back({false, {0.5 * cell, 0.0, source * cell}, {1.0, 0.0, 0.0}, pulse});
    Marcher<double> marcher(p, 1);
    const auto steps = static_cast<long>((pulse_s + (ring + 60) * cell / c0_m_per_s) / p.lattice.dt_s);
    std::array<std::array<Complex, n_frequencies>, 2> sums{};
    for (long n = 1; n <= steps; ++n) {
      marcher.advance(1, {});
      const double* ex = marcher.fields().row(Component::ex, 0, 0);
      for (std::size_t f = 0; f < n_frequencies; ++f) {
        const double hz = highest_hz * (0.4 + 0.1 * static_cast<double>(f));
        const Complex turn = std::exp(Complex(0.0, -2.0 * pi * hz * static_cast<double>(n) * p.lattice.dt_s));
        sums[0][f] += ex[front - 10] * turn;
        sums[1][f] += ex[back + 10] * turn;
      }
    }
    return sums;
  };
  const auto with = run_once(true), without = run_once(false);
  Bands bands;
  for (std::size_t f = 0; f < n_frequencies; ++f) {
    const double hz = highest_hz * (0.4 + 0.1 * static_cast<double>(f));
    bands.measured[f] = {std::abs(with[0][f] - without[0][f]) / std::abs(without[0][f]),
                         std::abs(with[1][f]) / std::abs(without[1][f])};
    bands.expected[f] = exact(slab, hz);
  }
  return bands;
}

double worst_error(const Bands& bands) {
  double worst = 0.0;
  for (std::size_t f = 0; f < n_frequencies; ++f) {
    worst = std::max(worst, std::abs(bands.measured[f].reflection - bands.expected[f].reflection));
    worst = std::max(worst, std::abs(bands.measured[f].transmission - bands.expected[f].transmission));
  }
  return worst;
}

}  // namespace

TEST_CASE("Slabs reflect and transmit within 1 % of the exact result at 30 cells per wavelength",
          "[published][slab]") {
  const double thickness = GENERATE(5e-3, 12.5e-3, 30e-3);
  const double conductivity = GENERATE(0.0, 0.2);
  const Slab slab{4.0, conductivity, thickness};
  const Bands bands = run_slab(slab, 6e9, 30.0);
  for (std::size_t f = 0; f < n_frequencies; ++f) {
    CAPTURE(thickness, conductivity, f, bands.measured[f].reflection, bands.expected[f].reflection,
            bands.measured[f].transmission, bands.expected[f].transmission);
    // 1 % of the incident wave: at the zeros of R a relative error would mean nothing.
    CHECK(std::abs(bands.measured[f].reflection - bands.expected[f].reflection) < 0.01);
    CHECK(std::abs(bands.measured[f].transmission - bands.expected[f].transmission) < 0.01);
  }
}

TEST_CASE("The slab's error falls with the square of the cell", "[published][slab][convergence]") {
  const double conductivity = GENERATE(0.0, 0.2);
  const Slab slab{4.0, conductivity, 12.5e-3};
  const double coarse = worst_error(run_slab(slab, 6e9, 15.0)), fine = worst_error(run_slab(slab, 6e9, 30.0));
  CAPTURE(conductivity, coarse, fine);
  CHECK(std::log2(coarse / fine) == Approx(2.0).margin(0.25));
}
