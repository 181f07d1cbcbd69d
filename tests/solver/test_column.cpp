// Columns one cell wide: what the lattice does exactly, and what a layer reflects against the lattice
// recursion.
#include <catch2/catch.hpp>
#include <complex>

#include "solver/recorders/points.hpp"
#include "solver/shell/lattice_reflection.hpp"
#include "tests/solver/setup.hpp"

using namespace wanewall;
using namespace wanewall::test;
using Complex = std::complex<double>;

namespace {

/// Ex and Hy wave packets along z, or their cyclic images along x and y.
struct Turned {
  Axis along, e, h;
};
const Turned turns[3]{{Axis::z, Axis::x, Axis::y}, {Axis::x, Axis::y, Axis::z}, {Axis::y, Axis::z, Axis::x}};

Problem column(const Turned& turn, int cells, double cell_m) {
  Index3 n{1, 1, 1};
  n[static_cast<std::size_t>(index_of(turn.along))] = cells;
  Problem problem = vacuum_problem(n, {cell_m, cell_m, cell_m});
  set_periodic(problem, turn.e);
  set_periodic(problem, turn.h);
  set_courant(problem, 1.0);
  return problem;
}

double& value_at(Marcher<double>& marcher, Component c, const Turned& turn, int n) {
  Index3 at{0, 0, 0};
  at[static_cast<std::size_t>(index_of(turn.along))] = n;
  return marcher.fields().row(c, at[0], at[1])[at[2]];
}

}  // namespace

TEST_CASE("At the Courant limit a pulse moves one cell per step", "[column][exact]") {
  const auto& turn = turns[GENERATE(0, 1, 2)];
  constexpr int cells = 120, start = 30, steps = 60;
  Marcher<double> marcher(column(turn, cells, 2e-3), 2);
  const auto shape = [](double n) { return std::exp(-0.08 * (n - start) * (n - start)); };
  // E at step 0 and H half a step later, which is half a cell further: f(n - step).
  for (int n = 1; n < cells; ++n) value_at(marcher, electric(turn.e), turn, n) = shape(n);
  for (int n = 0; n < cells; ++n) value_at(marcher, magnetic(turn.h), turn, n) = shape(n);
  marcher.advance(steps, {});
  double worst = 0.0;
  for (int n = 1; n < cells; ++n)
    worst = std::max(worst, std::abs(value_at(marcher, electric(turn.e), turn, n) - shape(n - steps)));
  INFO("axis " << name_of(turn.along) << ", worst " << worst * 1e15 << "e-15");
  CHECK(worst < 1e-12);  // 60 steps of rounding
}

TEST_CASE("A metal wall sends tangential E back with its sign turned", "[column][exact]") {
  // The wall is the far end of the lattice, or a perfect conductor that fills the last 20 cells.
  const bool object = GENERATE(false, true);
  const auto& turn = turns[GENERATE(0, 1, 2)];
  constexpr int cells = 120, start = 60;
  Problem problem = column(turn, cells, 2e-3);
  const int wall = object ? cells - 20 : cells;
  if (object) {
    problem.media.push_back({"metal", 1.0, 1.0, 0.0, 0.0, true, false});
    problem.objects.push_back({HalfSpace{turn.along, wall * 2e-3, false}, 1, "metal"});
  }
  Marcher<double> marcher(problem, 2);
  const auto shape = [](double n) { return std::exp(-0.02 * (n - start) * (n - start)); };
  for (int n = 1; n < cells; ++n) value_at(marcher, electric(turn.e), turn, n) = shape(n);
  for (int n = 0; n < cells; ++n) value_at(marcher, magnetic(turn.h), turn, n) = shape(n);
  const int steps = 2 * (wall - start);
  marcher.advance(steps, {});
  double worst = 0.0;
  for (int n = 1; n < wall; ++n)  // mirrored in the wall: f(2 wall - n - steps), with its sign turned
    worst =
        std::max(worst, std::abs(value_at(marcher, electric(turn.e), turn, n) + shape(2 * wall - n - steps)));
  CAPTURE(object, worst);
  CHECK(worst < 1e-10);
}

TEST_CASE("A magnetic wall sends tangential E back with its sign kept", "[column][exact]") {
  const bool high = GENERATE(false, true);
  const auto& turn = turns[GENERATE(0, 1, 2)];
  constexpr int cells = 120, start = 60;
  Problem problem = column(turn, cells, 2e-3);
  set_face(problem, side_of(turn.along, high), FaceKind::magnetic_wall);
  set_courant(problem, 1.0);
  Marcher<double> marcher(problem, 2);
  const auto shape = [](double n) { return std::exp(-0.02 * (n - start) * (n - start)); };
  for (int n = 0; n <= cells; ++n) value_at(marcher, electric(turn.e), turn, n) = shape(n);
  // Travelling towards the wall: H half a step later is half a cell further on.
  for (int n = 0; n < cells; ++n)
    value_at(marcher, magnetic(turn.h), turn, n) = high ? shape(n) : -shape(n + 1);
  marcher.advance(2 * (cells - start), {});
  double worst = 0.0;
  for (int n = 1; n < cells; ++n) {
    const double expected = high ? shape(2 * cells - n - 2 * (cells - start)) : shape(-n + 2 * start);
    worst = std::max(worst, std::abs(value_at(marcher, electric(turn.e), turn, n) - expected));
  }
  CAPTURE(high, worst);
  CHECK(worst < 1e-10);
}

namespace {

/// A guide between two electric x walls, one periodic cell deep in y. Its first mode is a pair of plane waves
/// at sin(theta) = K_x / W, so one layer can be read at any angle with one mode and no taper. Mode 0 is the
/// plane wave along z (H_y only).
struct Guide {
  static constexpr int width = 8;
  double cell_m = 1e-3;
  bool te = true;  // E_y (s polarisation), else H_y
  int mode = 1;

  double transverse_k_per_m() const { return 2.0 / cell_m * std::sin(0.5 * pi * mode / width); }

  Problem problem(int length, const LayerTable& layer) const {
    Problem p = vacuum_problem({width, 1, length + layer.cells()}, {cell_m, cell_m, cell_m});
    set_periodic(p, Axis::y);
    if (layer.cells() > 0) set_face(p, Side::z_hi, FaceKind::cfs_pml, layer);
    set_courant(p, 0.99);
    return p;
  }

  double omega_for_angle(double theta, double dt_s) const {
    // Without a cut-off any frequency will do: 20 cells per wavelength.
    const double w = mode == 0 ? 2.0 * pi / (20.0 * cell_m) : transverse_k_per_m() / std::sin(theta);
    return 2.0 / dt_s * std::asin(0.5 * c0_m_per_s * dt_s * w);
  }

  void add_source(Problem& p, int k, const Pulse& pulse) const {
    for (int i = 0; i <= width; ++i) {
      Dipole dipole;
      dipole.is_magnetic = !te;
      const double x = te ? i * cell_m : (i + 0.5) * cell_m;
      if (te ? (i == 0 || i == width) : i == width) continue;
      const double shape = te ? std::sin(pi * mode * i / width) : std::cos(pi * mode * (i + 0.5) / width);
      dipole.position_m = {x, te ? 0.5 * cell_m : 0.0, te ? k * cell_m : (k + 0.5) * cell_m};
      dipole.moment = {0.0, shape, 0.0};
      dipole.pulse = pulse;
      p.dipoles.push_back(dipole);
    }
  }
};

/// Amplitude of the mode at a node plane, running DFT.
Complex mode_amplitude(const Problem& problem, const Guide& guide, int k, long steps, double omega) {
  Marcher<double> marcher(problem, 1);
  const Component c = guide.te ? Component::ey : Component::hy;
  Complex sum = 0.0;
  for (long n = 1; n <= steps; ++n) {
    marcher.advance(1, {});
    const double t = static_cast<double>(n) * problem.lattice.dt_s;
    sum += marcher.fields().row(c, 2, 0)[k] * std::exp(Complex(0.0, -omega * t));
  }
  return sum;
}

}  // namespace

TEST_CASE("A cfs_pml face reflects what the lattice recursion says, both polarisations", "[column][shell]") {
  const double theta = degrees(GENERATE(0.0, 30.0, 50.0, 70.0));
  const bool te = GENERATE(true, false);
  const int cells = GENERATE(2, 5, 10);
  const double kappa_max = GENERATE(1.0, 3.0);
  Guide guide;
  guide.te = te;
  guide.mode = theta == 0.0 ? 0 : 1;
  if (guide.mode == 0 && te) return;  // normal incidence has no polarisation
  PolynomialGrading grading;
  grading.order = 3.0;
  // From a layer that hardly absorbs to one near -100 dB.
  grading.sigma_max_s_per_m = sigma_max_rule(3.0, guide.cell_m, 1.0) * (cells == 10  ? 1.3
                                                                        : cells == 5 ? 1.0
                                                                                     : 0.3);
  grading.kappa_max = kappa_max;
  grading.alpha_max_s_per_m = 0.01;
  const LayerTable layer = polynomial_layer(grading, cells);
  const Problem shape = guide.problem(10, layer);
  const double dt = shape.lattice.dt_s;
  const double omega = guide.omega_for_angle(theta, dt);
  const double cutoff = guide.mode == 0 ? 0.0 : guide.omega_for_angle(0.5 * pi, dt);
  // Narrow enough that nothing is left at the mode's cut-off, where it would creep.
  Pulse pulse;
  pulse.centre_hz = omega / (2.0 * pi);
  pulse.width_s = 5.3 / (omega - cutoff);
  pulse.delay_s = pulse_start_in_widths * pulse.width_s;
  const double group = c0_m_per_s * std::cos(theta);
  const int gap = 12;  // cells from the reading plane to the layer
  const double pulse_s = 2.0 * pulse.delay_s;
  const auto steps = static_cast<long>((pulse_s + 8.0 * gap * guide.cell_m / group) / dt);
  // Nothing may come back from the low end, or in the reference from the high end, while the record runs.
  const int reach = static_cast<int>(0.55 * static_cast<double>(steps) * dt * c0_m_per_s / guide.cell_m) + 20;
  const int source = reach, reading = source + 8, face = reading + gap;

  Problem with_layer = guide.problem(face, layer);
  guide.add_source(with_layer, source, pulse);
  Problem without = guide.problem(reading + reach, {});
  guide.add_source(without, source, pulse);
  const Complex incident = mode_amplitude(without, guide, reading, steps, omega);
  const Complex total = mode_amplitude(with_layer, guide, reading, steps, omega);
  const double measured = db(std::abs(total - incident) / std::abs(incident));
  const double w = lattice_omega(omega, dt) / c0_m_per_s;
  const double kt = guide.transverse_k_per_m();
  const double expected = db(std::abs(layer_reflection(layer, guide.cell_m, dt, omega, w * w - kt * kt)));
  CAPTURE(te, theta * 180.0 / pi, cells, kappa_max, measured, expected, steps, reach);
  CHECK(std::abs(measured - expected) < 0.1);
}

namespace {

/// Reflection of a matched slab at normal incidence by brute force on the lattice's own two equations per
/// cell.
Complex slab_reflection(const LayerTable& layer, double cell_m, double dt_s, double omega) {
  const Complex half_step = std::exp(Complex(0.0, 0.5 * omega * dt_s));
  const auto admittivity = [&](double sigma) {  // (g - decay/g)/gain for E and, being matched, for H alike
    const UpdateCoefficients c = update_coefficients(1.0, sigma / eps0_f_per_m, dt_s);
    return (half_step - c.decay / half_step) / c.gain;
  };
  Complex e = 0.0, h = 1.0;  // at the wall
  for (std::size_t d = static_cast<std::size_t>(layer.cells()); d-- > 0;) {
    e += cell_m * admittivity(layer.sigma_h_s_per_m[d]) * h;
    h += cell_m * admittivity(layer.sigma_e_s_per_m[d]) * e;
  }
  const double w = lattice_omega(omega, dt_s) / c0_m_per_s;
  const Complex before = e + cell_m * Complex(0.0, w) * h;
  const Complex p = std::exp(Complex(0.0, 1.0) * wavenumber_of_lattice(w * w, cell_m) * cell_m);
  return (e * p - before) / (before - e / p);
}

}  // namespace

TEST_CASE("A matched slab reflects what its own equations say at normal incidence", "[column][shell]") {
  const int cells = GENERATE(6, 12);
  Guide guide;
  guide.te = false;
  guide.mode = 0;
  PolynomialGrading grading;
  grading.order = 2.0;
  grading.sigma_max_s_per_m = sigma_max_for_reflection(cells == 6 ? 1e-2 : 1e-4, 2.0, cells * guide.cell_m);
  const LayerTable layer = polynomial_layer(grading, cells);
  Problem with_layer = guide.problem(400, layer);
  set_face(with_layer, Side::z_hi, FaceKind::matched_slab, layer);
  Problem without = guide.problem(1000, {});
  const double dt = without.lattice.dt_s, omega = guide.omega_for_angle(0.0, dt);
  Pulse pulse;
  pulse.centre_hz = omega / (2.0 * pi);
  pulse.width_s = 6.0 / omega;
  pulse.delay_s = pulse_start_in_widths * pulse.width_s;
  guide.add_source(with_layer, 370, pulse);
  guide.add_source(without, 370, pulse);
  const long steps = 560;
  const Complex incident = mode_amplitude(without, guide, 385, steps, omega);
  const Complex total = mode_amplitude(with_layer, guide, 385, steps, omega);
  const double measured = db(std::abs(total - incident) / std::abs(incident));
  const double expected = db(std::abs(slab_reflection(layer, guide.cell_m, dt, omega)));
  CAPTURE(cells, measured, expected);
  CHECK(std::abs(measured - expected) < 0.1);
  CHECK(expected < -20.0);
}
