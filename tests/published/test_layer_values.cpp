// The lattice reflection of graded layers against values computed by an independent program, and its stretch
// against the continuum's.
#include <catch2/catch.hpp>

#include "solver/shell/lattice_reflection.hpp"
#include "solver/shell/stretch.hpp"
#include "tests/solver/setup.hpp"

using namespace wanewall;
using namespace wanewall::test;
using Complex = std::complex<double>;

TEST_CASE("Graded layers reflect what an independent computation gives", "[published][shell]") {
  // 20 cells per wavelength, Courant number 0.99, order 3, sigma by Gedney's rule: [dB] at 0, 30, 45, 60, 75
  // degrees, computed separately from the same recursion (not published).
  struct Row {
    int cells;
    double db[5];
  };
  const Row row =
      GENERATE(Row{5, {-59.7, -61.4, -67.1, -53.4, -31.3}}, Row{10, {-91.3, -92.4, -94.7, -99.3, -62.8}});
  const double angle[5]{0.0, 30.0, 45.0, 60.0, 75.0};
  const double d = 1e-3, dt = 0.99 * d / c0_m_per_s / std::sqrt(3.0),
               omega = 2.0 * pi * c0_m_per_s / (20.0 * d);
  PolynomialGrading grading;
  grading.sigma_max_s_per_m = sigma_max_rule(3.0, d, 1.0);
  const LayerTable layer = polynomial_layer(grading, row.cells);
  for (int n = 0; n < 5; ++n) {
    const double s = std::sin(degrees(angle[n])), c = std::cos(degrees(angle[n]));
    // The lattice wavenumber of a wave in this direction, by bisection.
    const double w = lattice_omega(omega, dt) / c0_m_per_s;
    double lo = 0.5 * w, hi = 2.0 * w;
    for (int step = 0; step < 100; ++step) {
      const double k = 0.5 * (lo + hi);
      const double kx = 2.0 / d * std::sin(0.5 * k * s * d), kz = 2.0 / d * std::sin(0.5 * k * c * d);
      (kx * kx + kz * kz < w * w ? lo : hi) = k;
    }
    const double kz = 2.0 / d * std::sin(0.5 * lo * c * d);
    CAPTURE(row.cells, angle[n]);
    CHECK(db(std::abs(layer_reflection(layer, d, dt, omega, kz * kz))) == Approx(row.db[n]).margin(0.06));
  }
}

TEST_CASE("For short steps the recursion is the stretch kappa + sigma/(alpha + j omega eps0)", "[shell]") {
  const double sigma = 0.7, kappa = 3.0, alpha = 0.05, omega = 2.0 * pi * 2e9, dt = 1e-17;
  const Recursion r = layer_recursion(sigma, kappa, alpha, 1.0, dt);
  const Complex inverse = 1.0 / kappa + r.c_per_m / (1.0 - r.b * std::exp(Complex(0.0, -omega * dt)));
  const Complex exact = 1.0 / (kappa + sigma / (alpha + Complex(0.0, omega * eps0_f_per_m)));
  CHECK(std::abs(inverse - exact) < 1e-5 * std::abs(exact));
}
