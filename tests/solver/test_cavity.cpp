// A closed metal box: the scheme's own resonances, their order, and the likeness of the three axes.
#include <catch2/catch.hpp>
#include <cstring>

#include "tests/solver/setup.hpp"

using namespace wanewall;
using namespace wanewall::test;

namespace {

struct Cavity {
  Index3 cells;
  Vec3 size_m;
  Index3 mode;

  Vec3 cell_m() const { return {size_m[0] / cells[0], size_m[1] / cells[1], size_m[2] / cells[2]}; }
  Problem problem() const { return vacuum_problem(cells, cell_m()); }

  /// Exact: c0 pi sqrt(sum (m/a)^2), e.g. D. M. Pozar, Microwave Engineering (from memory).
  double exact_omega() const {
    double sum = 0.0;
    for (std::size_t a = 0; a < 3; ++a) sum += std::pow(mode[a] / size_m[a], 2);
    return c0_m_per_s * pi * std::sqrt(sum);
  }
  Vec3 lattice_k() const {
    Vec3 k;
    for (std::size_t a = 0; a < 3; ++a) k[a] = 2.0 / cell_m()[a] * std::sin(0.5 * pi * mode[a] / cells[a]);
    return k;
  }
  /// The scheme's dispersion relation: sin(omega dt/2)^2 = (c0 dt/2)^2 sum K_i^2 (Taflove and Hagness, from
  /// memory).
  double lattice_omega(double dt_s) const {
    const Vec3 k = lattice_k();
    return 2.0 / dt_s *
           std::asin(0.5 * c0_m_per_s * dt_s * std::sqrt(k[0] * k[0] + k[1] * k[1] + k[2] * k[2]));
  }
};

/// Sets E to the mode with an amplitude vector across the lattice wavevector; H to zero.
void excite(Marcher<double>& marcher, const Cavity& cavity, Vec3 amplitude) {
  for (Axis along : all_axes) {
    const Component c = electric(along);
    for (int i = 0; i <= cavity.cells[0]; ++i)
      for (int j = 0; j <= cavity.cells[1]; ++j)
        for (int k = 0; k <= cavity.cells[2]; ++k) {
          const Index3 at{i, j, k};
          double value = amplitude[static_cast<std::size_t>(index_of(along))];
          bool exists = true;
          for (Axis a : all_axes) {
            const auto n = static_cast<std::size_t>(index_of(a));
            const double phase = pi * cavity.mode[n] / cavity.cells[n];
            exists = exists && (!is_half(c, a) || at[n] < cavity.cells[n]);
            value *= is_half(c, a) ? std::cos(phase * (at[n] + 0.5)) : std::sin(phase * at[n]);
            if (!is_half(c, a) && (at[n] == 0 || at[n] == cavity.cells[n])) value = 0.0;
          }
          if (exists) marcher.fields().row(c, i, j)[k] = value;
        }
  }
}

/// From E(n + m) + E(n - m) = 2 cos(m omega dt) E(n): the frequency near `guess` that the run really has.
double measured_omega(const Cavity& cavity, double guess) {
  const Problem problem = cavity.problem();
  Marcher<double> marcher(problem, 2);
  const Vec3 k = cavity.lattice_k();
  excite(marcher, cavity, {k[1], -k[0], 0.0});
  const double dt = problem.lattice.dt_s;
  constexpr long m = 501;
  // Away from the nodes of all modes used here.
  const double* probe = &marcher.fields().row(Component::ex, 3, 4)[5];
  const double before = *probe;
  marcher.advance(m, {});
  const double middle = *probe;
  marcher.advance(m, {});
  const double after = *probe;
  const double cosine = (before + after) / (2.0 * middle);
  REQUIRE(std::abs(cosine) < 1.0);
  const double turns = guess * dt * m / (2.0 * pi), base = std::acos(cosine) / (2.0 * pi);
  const double up = std::round(turns - base) + base, down = std::round(turns + base) - base;
  return (std::abs(up - turns) < std::abs(down - turns) ? up : down) * 2.0 * pi / (dt * m);
}

}  // namespace

TEST_CASE("Cavity resonances follow the lattice dispersion formula", "[cavity][physics]") {
  const Cavity cavity = GENERATE(Cavity{{12, 15, 18}, {0.12, 0.15, 0.18}, {1, 1, 1}},
                                 Cavity{{12, 15, 18}, {0.12, 0.25, 0.11}, {2, 1, 3}},
                                 Cavity{{20, 10, 14}, {0.10, 0.10, 0.10}, {1, 2, 1}});
  const double expected = cavity.lattice_omega(cavity.problem().lattice.dt_s);
  const double measured = measured_omega(cavity, expected);
  CAPTURE(measured, expected, measured / expected - 1.0);
  CHECK(std::abs(measured / expected - 1.0) < 1e-6);
}

TEST_CASE("Cavity resonances approach the exact ones at second order", "[cavity][physics]") {
  const Index3 mode = GENERATE(Index3{1, 1, 1}, Index3{2, 1, 1}, Index3{1, 2, 3});
  const auto error = [&](int n) {
    const Cavity cavity{{n, n, n}, {0.1, 0.12, 0.15}, mode};
    return std::abs(measured_omega(cavity, cavity.lattice_omega(cavity.problem().lattice.dt_s)) /
                        cavity.exact_omega() -
                    1.0);
  };
  const double coarse = error(16), fine = error(32);
  CAPTURE(coarse, fine);
  CHECK(std::log2(coarse / fine) == Approx(2.0).margin(0.1));
}

TEST_CASE("The three axes are alike: cyclic images agree to a few units in the last place",
          "[cavity][symmetry]") {
  const Cavity cavity{{11, 14, 17}, {0.11, 0.15, 0.16}, {1, 2, 1}};
  Marcher<double> straight(cavity.problem(), 2);
  const Vec3 amplitude{0.3, -0.7, 0.5};  // no mode of the lattice: H and charges of all kinds
  excite(straight, cavity, amplitude);
  straight.advance(200, {});
  Cavity turned = cavity;
  Vec3 turned_amplitude{};
  for (std::size_t a = 0; a < 3; ++a) {
    turned.cells[(a + 1) % 3] = cavity.cells[a];
    turned.size_m[(a + 1) % 3] = cavity.size_m[a];
    turned.mode[(a + 1) % 3] = cavity.mode[a];
    turned_amplitude[(a + 1) % 3] = amplitude[a];
  }
  Marcher<double> cyclic(turned.problem(), 2);
  excite(cyclic, turned, turned_amplitude);
  cyclic.advance(200, {});
  double worst = 0.0, largest = 0.0;
  for (Component c : all_components) {
    const Component image = is_electric(c) ? electric(next(axis_of(c))) : magnetic(next(axis_of(c)));
    for (int i = 0; i <= cavity.cells[0]; ++i)
      for (int j = 0; j <= cavity.cells[1]; ++j)
        for (int k = 0; k <= cavity.cells[2]; ++k) {
          const double a = straight.fields().row(c, i, j)[k], b = cyclic.fields().row(image, k, i)[j];
          worst = std::max(worst, std::abs(a - b));
          largest = std::max(largest, std::abs(a));
        }
  }
  CAPTURE(worst, largest);
  CHECK(largest > 0.1);
  CHECK(worst < 200 * 4 * std::numeric_limits<double>::epsilon() * largest);  // a few ulp per step at most
}
