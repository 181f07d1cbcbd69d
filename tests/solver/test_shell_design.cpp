// The search for layer tables: its minimiser, its gradients, and what its tables reflect by the exact
// formula.
#include <omp.h>

#include <catch2/catch.hpp>
#include <cmath>
#include <vector>

#include "geometry/constants.hpp"
#include "solver/shell/design.hpp"
#include "solver/shell/graded_objective.hpp"
#include "solver/shell/lattice_reflection.hpp"
#include "solver/shell/minimise.hpp"
#include "solver/shell/moebius_objective.hpp"
#include "tests/solver/setup.hpp"

using namespace wanewall;
using namespace wanewall::test;

namespace {

constexpr double cell_m = 1e-3;
const double courant = 0.99 / std::sqrt(3.0);

/// A box of 24 cells with a source 4 cells from the face, 10 cells per wavelength at the pulse's top.
DesignInputs box() {
  DesignInputs inputs;
  inputs.courant = courant;
  inputs.diagonal_cells = 24.0 * std::sqrt(3.0);
  inputs.clearance_cells = 4.0;
  inputs.alpha_min = 0.12 / inputs.diagonal_cells;
  for (int n = 0; n < 12; ++n) inputs.frequencies.push_back({10.0 * std::pow(33.3, n / 11.0), 1.0});
  return inputs;
}

/// Worst reflection over 10 to 100 cells per wavelength and 0 to an angle, on a grid of its own.
template <class Table>
double worst_db(const Table& table, double largest_deg) {
  const double dt = courant * cell_m / c0_m_per_s;
  double worst = 0.0;
  for (int w = 0; w <= 40; ++w) {
    const double omega = 2.0 * pi * c0_m_per_s / (10.0 * std::pow(10.0, w / 40.0) * cell_m);
    const double k = lattice_omega(omega, dt) / c0_m_per_s;
    for (double angle = 0.0; angle <= largest_deg + 1e-9; angle += 0.25) {
      const double kn = k * std::cos(degrees(angle));
      worst = std::max(worst, std::abs(layer_reflection(table, cell_m, dt, omega, kn * kn)));
    }
  }
  return db(worst);
}

PlaneWaveRange up_to(double deg) {
  return {courant, 10.0, 100.0, degrees(deg)};
}

void check_gradient(const LayerObjective& objective) {
  SplitMix dice(7);
  const std::vector<double> y = objective.start(5, [&] { return dice.next(); });
  for (const double norm : {6.0, 1.0}) {
    std::vector<double> gradient;
    objective.value(y, norm, &gradient);
    double largest = 0.0;
    for (double g : gradient) largest = std::max(largest, std::abs(g));
    REQUIRE(largest > 1e-3);
    for (std::size_t i = 0; i < y.size(); ++i) {
      constexpr double step = 3e-5;
      std::vector<double> up = y, down = y;
      up[i] += step;
      down[i] -= step;
      const double slope =
          (objective.value(up, norm, nullptr) - objective.value(down, norm, nullptr)) / (2.0 * step);
      CAPTURE(norm, i, slope, gradient[i]);
      CHECK(std::abs(slope - gradient[i]) < 1e-5 * largest);
    }
  }
}

}  // namespace

TEST_CASE("The minimiser finds the end of a bent valley", "[shell][design]") {
  // H. H. Rosenbrock, Comput. J. 3, 175 (1960): 100 (y - x^2)^2 + (1 - x)^2, least at (1, 1).
  std::vector<double> x{-1.2, 1.0};
  const double value = minimise(
      [](const std::vector<double>& p, std::vector<double>& g) {
        const double a = p[1] - p[0] * p[0], b = 1.0 - p[0];
        g = {-400.0 * a * p[0] - 2.0 * b, 200.0 * a};
        return 100.0 * a * a + b * b;
      },
      x, 500, 1e-14);
  CHECK(value < 1e-12);
  CHECK(x[0] == Approx(1.0).epsilon(1e-5));
  CHECK(x[1] == Approx(1.0).epsilon(1e-5));
}

TEST_CASE("Random numbers are those of the published generator", "[shell][design]") {
  // splitmix64 with state 0 gives 0xE220A8397B1DCDAF first (from memory).
  SplitMix dice(0);
  CHECK(dice.next() == static_cast<double>(0xE220A8397B1DCDAFULL >> 11) / 9007199254740992.0);
}

TEST_CASE("Gradients of the designs' objectives are those of differences", "[shell][design]") {
  check_gradient(MoebiusObjective(near_field_points(box()), 4, box().alpha_min, 1.0));
  check_gradient(GradedObjective(near_field_points(box()), 4, box().alpha_min));
}

TEST_CASE("Points lie on the axes and the arc, outside its radius", "[shell][design]") {
  DesignInputs inputs = box();
  inputs.frequencies = {{20.0, 2.0}};
  const std::vector<DesignPoints> all = near_field_points(inputs);
  REQUIRE(all.size() == 1);
  const DesignPoints& points = all[0];
  REQUIRE(points.weight.size() == 16 + 8 + 14);
  const double k0 = 2.0 * pi / 20.0, size = inputs.diagonal_cells;
  const double delta = std::sqrt(4.0 * k0 / size + 2.25 / (size * size));
  for (std::size_t i = 0; i < points.weight.size(); ++i) {
    const double radius = std::hypot(points.q_re[i], points.q_im[i]);
    CHECK(radius >= std::tanh(0.5 * delta) * (1.0 - 1e-12));
    CHECK(points.weight[i] <= 1.0);
    if (i < 16) CHECK(points.q_re[i] == 0.0);
    if (i >= 16 && i < 24) CHECK(radius == Approx(std::tan(0.5 * delta)));
    if (i >= 24) CHECK(points.q_im[i] == 0.0);
  }
  // The end of the imaginary axis is the wave along the normal in the densest medium.
  const double omega = 2.0 / courant * std::sin(0.5 * k0 * courant);
  CHECK(points.q_im[15] == Approx(std::tan(std::asin(omega))));
  // Clearance 4 counts as 2.5 cells; thick ones as 3 at most.
  CHECK(points.weight[24] == Approx(std::exp(-5.0 * delta)));
  CHECK(design_clearance(100.0) == 3.0);
}

TEST_CASE("Tables for plane waves reach their levels on a dense grid", "[shell][design]") {
  CHECK(worst_db(design_moebius(up_to(60.0), 5, cell_m).table, 60.0) <= -180.0);
  CHECK(worst_db(design_moebius(up_to(80.0), 8, cell_m).table, 80.0) <= -195.0);
  CHECK(worst_db(design_moebius(up_to(85.0), 10, cell_m).table, 85.0) <= -200.0);
  CHECK(worst_db(design_cfs_pml(up_to(60.0), 5, cell_m).table, 60.0) <= -85.0);
  CHECK(worst_db(design_cfs_pml(up_to(85.0), 10, cell_m).table, 85.0) <= -95.0);
  // The textbook's grading, for comparison.
  PolynomialGrading grading;
  grading.sigma_max_s_per_m = sigma_max_rule(3.0, cell_m, 1.0);
  CHECK(worst_db(polynomial_layer(grading, 5), 60.0) == Approx(-50.4).margin(0.3));
  CHECK(worst_db(polynomial_layer(grading, 10), 85.0) == Approx(-22.0).margin(0.5));
}

TEST_CASE("More cells do better, and the figures are those of the tables", "[shell][design]") {
  double before_db = 0.0;
  for (const int cells : {3, 4, 5, 6}) {
    const Designed<MoebiusTable> found = design_moebius(box(), cells, cell_m);
    const DesignFigures again = figures_of(found.table, box(), cell_m);
    CAPTURE(cells, found.figures.mean_db);
    CHECK(found.table.cells() == cells);
    CHECK(again.mean_db == Approx(found.figures.mean_db).margin(1e-6));
    CHECK(again.worst_db == Approx(found.figures.worst_db).margin(1e-6));
    CHECK(found.figures.mean_db < before_db - 10.0);
    before_db = found.figures.mean_db;
    for (std::size_t d = 0; d < found.table.kappa.size(); ++d) {
      CHECK(found.table.kappa[d] > 0.0);
      CHECK(found.table.alpha_s_per_m[d] * eta0_ohm * cell_m >= box().alpha_min * (1.0 - 1e-12));
    }
  }
  CHECK(before_db < -90.0);
  const Designed<LayerTable> graded = design_cfs_pml(box(), 5, cell_m);
  CHECK(figures_of(graded.table, box(), cell_m).mean_db == Approx(graded.figures.mean_db).margin(1e-6));
  CHECK(graded.figures.mean_db < -65.0);
  PolynomialGrading grading;
  grading.sigma_max_s_per_m = sigma_max_rule(3.0, cell_m, 1.0);
  CHECK(figures_of(polynomial_layer(grading, 5), box(), cell_m).mean_db > graded.figures.mean_db + 20.0);
}

TEST_CASE("A design does not depend on the number of threads", "[shell][design]") {
  const int before = omp_get_max_threads();
  omp_set_num_threads(1);
  const MoebiusTable one = design_moebius(box(), 4, cell_m).table;
  omp_set_num_threads(3);
  const MoebiusTable three = design_moebius(box(), 4, cell_m).table;
  omp_set_num_threads(before);
  CHECK(one.kappa == three.kappa);
  CHECK(one.sigma_s_per_m == three.sigma_s_per_m);
  CHECK(one.alpha_s_per_m == three.alpha_s_per_m);
}

TEST_CASE("A goal is met with the fewest cells, or told as missed", "[shell][design]") {
  const auto found = moebius_for_goal(box(), -60.0, 24, cell_m);
  CHECK(found.is_met);
  CHECK(found.design.figures.mean_db <= -70.0);
  CHECK(design_moebius(box(), found.design.table.cells() - 1, cell_m).figures.mean_db > -70.0);
  const auto missed = moebius_for_goal(box(), -60.0, 3, cell_m);
  CHECK_FALSE(missed.is_met);
  CHECK(missed.design.table.cells() == 3);
  CHECK_THROWS_AS(design_moebius(box(), 25, cell_m), std::invalid_argument);
  CHECK_THROWS_AS(design_moebius(box(), 0, cell_m), std::invalid_argument);
}

TEST_CASE("A slab's index and a thin clearance make a design harder", "[shell][design]") {
  DesignInputs dense = box(), thin = box();
  for (DesignFrequency& f : dense.frequencies) f.index = 3.0;
  thin.clearance_cells = 0.0;
  const MoebiusTable table = design_moebius(box(), 6, cell_m).table;
  const double plain_db = figures_of(table, box(), cell_m).mean_db;
  CHECK(figures_of(table, dense, cell_m).mean_db > plain_db + 6.0);
  CHECK(design_moebius(dense, 6, cell_m).figures.mean_db < figures_of(table, dense, cell_m).mean_db - 3.0);
  CHECK(design_moebius(thin, 6, cell_m).figures.mean_db > plain_db + 3.0);
}
