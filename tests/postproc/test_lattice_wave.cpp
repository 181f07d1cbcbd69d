#include "postproc/lattice_wave.hpp"

#include <catch2/catch.hpp>
#include <cmath>
#include <stdexcept>

#include "geometry/constants.hpp"

using namespace wanewall;

TEST_CASE("The normal wavenumber has the lattice's textbook phase velocity", "[lattice_wave]") {
  // Phase-velocity error along an axis at c dt = d/2: -1.27 % with 10 cells a wavelength, -0.31 % with 20.
  // Source: A. Taflove and S. C. Hagness, Computational Electrodynamics, 3rd ed., ch. 4 (figures from
  // memory).
  const double d_m = 1e-3, dt_s = 0.5 * d_m / c0_m_per_s;
  const auto error_percent = [&](double cells_per_wavelength) {
    const double f_hz = c0_m_per_s / (cells_per_wavelength * d_m);
    const auto kz = normal_wavenumber(face_medium(1.0, 1.0, 0.0, f_hz, dt_s), 0.0, d_m);
    CHECK(kz.imag() == 0.0);
    return 100.0 * (2.0 * pi * f_hz / (kz.real() * c0_m_per_s) - 1.0);
  };
  CHECK(error_percent(10.0) == Approx(-1.274).margin(6e-4));
  CHECK(error_percent(20.0) == Approx(-0.311).margin(6e-4));
}

TEST_CASE("Waves leave: they travel or decay outwards", "[lattice_wave]") {
  const double d_m = 1e-2, dt_s = 1.5e-11, f_hz = 2e9;
  const double sigma = GENERATE(0.0, 1e-6, 0.02, 5.0);
  const FaceMedium medium = face_medium(2.5, 1.3, sigma, f_hz, dt_s);
  for (double k_t : {0.0, 0.5, 0.999, 1.001, 1.5, 4.0}) {
    const std::complex<double> transverse = -std::pow(k_t * medium.w_per_m(), 2);
    const auto kz = normal_wavenumber(medium, transverse, d_m);
    CAPTURE(sigma, k_t, kz);
    const auto big_kz = 2.0 / d_m * std::sin(0.5 * d_m * kz);
    CHECK(std::abs(big_kz * big_kz - transverse - medium.w2_per_m2) < 1e-12 * std::abs(medium.w2_per_m2));
    CHECK(kz.imag() <= 0.0);
    if (kz.imag() == 0.0) CHECK(kz.real() > 0.0);
    if (sigma > 0.0) CHECK(kz.imag() < 0.0);
    if (k_t > 1.0) CHECK(kz.imag() < 0.0);
  }
}

TEST_CASE("Power of a wave in a lossless medium has its closed form", "[lattice_wave]") {
  const double d_m = 1.1e-2, dt_s = 1.5e-11, f_hz = 2.2e9, eps = 2.0, mu = 1.5;
  const FaceMedium medium = face_medium(eps, mu, 0.0, f_hz, dt_s);
  const double w = medium.w_per_m(), eta = eta0_ohm * std::sqrt(mu / eps);
  for (double theta : {0.0, 0.4, 0.9, 1.4}) {
    const double kz = normal_wavenumber(medium, -std::pow(w * std::sin(theta), 2), d_m).real();
    const NormalFlux flux = normal_flux(medium, kz, d_m);
    CHECK(flux.te_outgoing == Approx(std::sin(kz * d_m) / (2.0 * eta * w * d_m)).epsilon(1e-13));
    CHECK(flux.tm_outgoing == Approx(w * d_m / (4.0 * eta * std::tan(0.5 * kz * d_m))).epsilon(1e-13));
    CHECK(flux.te_returned == Approx(flux.te_outgoing).epsilon(1e-13));
    CHECK(flux.tm_returned == Approx(flux.tm_outgoing).epsilon(1e-13));
  }
}

TEST_CASE("Evanescent waves of a lossless medium carry no power alone", "[lattice_wave]") {
  const double d_m = 1e-2;
  const FaceMedium medium = face_medium(1.0, 1.0, 0.0, 2e9, 1.5e-11);
  const auto kz = normal_wavenumber(medium, -std::pow(1.4 * medium.w_per_m(), 2), d_m);
  const NormalFlux flux = normal_flux(medium, kz, d_m);
  const double scale = 1.0 / eta0_ohm;
  CHECK(std::abs(flux.te_outgoing) < 1e-14 * scale);
  CHECK(std::abs(flux.tm_outgoing) < 1e-14 * scale);
}

TEST_CASE("Power tends to the continuum's at second order in the mesh", "[lattice_wave][convergence]") {
  // |E|^2 cos(theta) / (2 eta) for any polarisation; for TM the tangential part is E cos(theta). In a
  // conductor at normal incidence Re(1/eta)/2 with eta = sqrt(j omega mu / (sigma + j omega eps)). Source: C.
  // A. Balanis, Advanced Engineering Electromagnetics, ch. 4 and 5 (from memory).
  const double f_hz = 1e9, theta = 0.7;
  const auto error = [&](double cells_per_wavelength, double sigma, bool tm) {
    const double d_m = c0_m_per_s / f_hz / cells_per_wavelength, dt_s = 0.5 * d_m / c0_m_per_s;
    const FaceMedium medium = face_medium(1.0, 1.0, sigma, f_hz, dt_s);
    if (sigma > 0.0) {
      const NormalFlux flux = normal_flux(medium, normal_wavenumber(medium, 0.0, d_m), d_m);
      const std::complex<double> y{sigma, 2.0 * pi * f_hz * eps0_f_per_m};
      const double exact =
          0.5 * std::sqrt(y / std::complex<double>{0.0, 2.0 * pi * f_hz * mu0_h_per_m}).real();
      // E and H are taken half a cell apart, over which the wave decays; the mean over both directions is
      // free of it.
      return std::abs(0.5 * (flux.te_outgoing + flux.te_returned) / exact - 1.0);
    }
    // The same true angle in both: the transverse wavenumber is the continuum's.
    const double k_x = 2.0 * pi * f_hz / c0_m_per_s * std::sin(theta);
    const double big_k_x = 2.0 / d_m * std::sin(0.5 * d_m * k_x);
    const NormalFlux flux = normal_flux(medium, normal_wavenumber(medium, -big_k_x * big_k_x, d_m), d_m);
    const double exact = tm ? 0.5 / (eta0_ohm * std::cos(theta)) : 0.5 * std::cos(theta) / eta0_ohm;
    return std::abs((tm ? flux.tm_outgoing : flux.te_outgoing) / exact - 1.0);
  };
  const double sigma = GENERATE(0.0, 0.05);
  const bool tm = GENERATE(false, true);
  const double coarse = error(40.0, sigma, tm), fine = error(80.0, sigma, tm);
  CAPTURE(sigma, tm, coarse, fine);
  CHECK(std::log2(coarse / fine) == Approx(2.0).margin(0.02));
}

TEST_CASE("A frequency beyond the time step's limit is refused", "[lattice_wave]") {
  CHECK_THROWS_AS(face_medium(1.0, 1.0, 0.0, 0.0, 1e-11), std::invalid_argument);
  CHECK_THROWS_AS(face_medium(1.0, 1.0, 0.0, 6e10, 1e-11), std::invalid_argument);
  CHECK_NOTHROW(face_medium(1.0, 1.0, 0.0, 4e10, 1e-11));
}
