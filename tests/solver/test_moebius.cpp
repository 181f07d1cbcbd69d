// Moebius layers: silent interface, R = -product of squared cell factors, on every axis, with corners.
#include <Eigen/Dense>
#include <catch2/catch.hpp>
#include <complex>
#include <random>

#include "solver/shell/lattice_reflection.hpp"
#include "solver/shell/moebius.hpp"
#include "tests/solver/setup.hpp"

using namespace wanewall;
using namespace wanewall::test;
using Complex = std::complex<double>;

namespace {

/// From the dimensionless numbers g = sigma eta0 d/2 and al = alpha eta0 d.
MoebiusTable table_of(const std::vector<double>& kappa, const std::vector<double>& g,
                      const std::vector<double>& al, double cell_m) {
  MoebiusTable table;
  table.kappa = kappa;
  for (double v : g) table.sigma_s_per_m.push_back(2.0 * v / (eta0_ohm * cell_m));
  for (double v : al) table.alpha_s_per_m.push_back(v / (eta0_ohm * cell_m));
  return table;
}

MoebiusTable random_table(int cells, double cell_m, unsigned seed) {
  std::mt19937 random(seed);
  std::uniform_real_distribution<double> uniform(0.0, 1.0);
  std::vector<double> kappa, g, al;
  for (int j = 0; j < cells; ++j) {
    kappa.push_back(0.2 + 3.0 * uniform(random));
    g.push_back(0.1 + 3.0 * uniform(random));
    al.push_back(0.001 + 0.3 * uniform(random));
  }
  return table_of(kappa, g, al, cell_m);
}

void set_moebius(Problem& problem, Side side, const MoebiusTable& table) {
  Face& face = problem.faces[static_cast<std::size_t>(index_of(side))];
  face.kind = FaceKind::moebius;
  face.layer = {};
  face.moebius = table;
  problem.lattice.shell_cells[static_cast<std::size_t>(index_of(side))] = table.cells();
}

/// The stretch s of a cell at a frequency, straight from its definition.
Complex stretch_of(const MoebiusTable& table, std::size_t j, double omega, double dt_s) {
  const Complex z_inverse = std::exp(Complex(0.0, -omega * dt_s));
  const Complex p = 2.0 / dt_s * (1.0 - z_inverse) / (1.0 + z_inverse);
  return table.kappa[j] + table.sigma_s_per_m[j] / (table.alpha_s_per_m[j] + eps0_f_per_m * p);
}

/// R = -product of ((1 - s q)/(1 + s q))^2, q = j tan(k d/2).
Complex product(const MoebiusTable& table, double cell_m, double dt_s, double omega, Complex normal_k2) {
  const Complex k = wavenumber_of_lattice(normal_k2, cell_m);
  const Complex q = Complex(0.0, 1.0) * std::tan(0.5 * k * cell_m);
  Complex r = -1.0;
  for (std::size_t j = 0; j < table.kappa.size(); ++j) {
    const Complex s = stretch_of(table, j, omega, dt_s);
    r *= (1.0 - s * q) / (1.0 + s * q) * (1.0 - s * q) / (1.0 + s * q);
  }
  return r;
}

/// A guide whose first mode is a pair of plane waves, along any axis: `along` the layer's normal, `across`
/// between electric walls, one periodic cell in the third.
struct Guide {
  static constexpr int width = 8;
  Axis along = Axis::z, across = Axis::x;
  bool high = true, te = true;
  double cell_m = 1e-3;

  Axis third() const { return static_cast<Axis>(3 - index_of(along) - index_of(across)); }
  double kt() const { return 2.0 / cell_m * std::sin(0.5 * pi / width); }

  Problem problem(int length, const MoebiusTable& table) const {
    Index3 n{1, 1, 1};
    n[static_cast<std::size_t>(index_of(along))] = length + table.cells();
    n[static_cast<std::size_t>(index_of(across))] = width;
    Problem p = vacuum_problem(n, {cell_m, cell_m, cell_m});
    set_periodic(p, third());
    if (table.cells() > 0) set_moebius(p, side_of(along, high), table);
    set_courant(p, 0.99);
    p.threads = 1;
    return p;
  }

  /// Nodes are counted from the far end towards the layer.
  double position_m(const Problem& p, double node) const {
    return (high ? node : p.lattice.cells(along) - node) * cell_m;
  }

  void add_source(Problem& p, int node, const Pulse& pulse) const {
    for (int i = 0; i <= width; ++i) {
      if (te ? (i == 0 || i == width) : i == width) continue;
      Dipole dipole;
      dipole.is_magnetic = !te;
      const double shape = te ? std::sin(pi * i / width) : std::cos(pi * (i + 0.5) / width);
      const auto at = [](Axis a) { return static_cast<std::size_t>(index_of(a)); };
      dipole.position_m[at(along)] = position_m(p, te ? node : node + 0.5);
      dipole.position_m[at(across)] = te ? i * cell_m : (i + 0.5) * cell_m;
      dipole.position_m[at(third())] = te ? 0.5 * cell_m : 0.0;
      dipole.moment[at(third())] = shape;
      dipole.pulse = pulse;
      p.dipoles.push_back(dipole);
    }
  }
};

Complex mode_amplitude(const Problem& problem, const Guide& guide, int node, long steps, double omega) {
  Marcher<double> marcher(problem, 1);
  const Component c = guide.te ? electric(guide.third()) : magnetic(guide.third());
  Index3 at{0, 0, 0};
  at[static_cast<std::size_t>(index_of(guide.across))] = 2;
  const int n = problem.lattice.cells(guide.along);
  at[static_cast<std::size_t>(index_of(guide.along))] = guide.high ? node
                                                        : guide.te ? n - node
                                                                   : n - 1 - node;
  Complex sum = 0.0;
  for (long step = 1; step <= steps; ++step) {
    marcher.advance(1, {});
    const double t = static_cast<double>(step) * problem.lattice.dt_s;
    sum += marcher.fields().row(c, at[0], at[1])[at[2]] * std::exp(Complex(0.0, -omega * t));
  }
  return sum;
}

struct Measured {
  double measured_db, expected_db;
};

Measured measure(const Guide& guide, double theta, const MoebiusTable& table) {
  const double dt = guide.problem(10, table).lattice.dt_s;
  const auto omega_of = [&](double sine) {
    return 2.0 / dt * std::asin(0.5 * c0_m_per_s * dt * guide.kt() / sine);
  };
  const double omega = omega_of(std::sin(theta)), cutoff = omega_of(1.0);
  Pulse pulse;
  pulse.centre_hz = omega / (2.0 * pi);
  pulse.width_s = 7.0 / (omega - cutoff);
  pulse.delay_s = pulse_start_in_widths * pulse.width_s;
  const double group = c0_m_per_s * std::cos(theta);
  constexpr int gap = 6;
  const auto steps = static_cast<long>((2.0 * pulse.delay_s + 16.0 * gap * guide.cell_m / group) / dt);
  const int reach = static_cast<int>(0.55 * static_cast<double>(steps) * dt * c0_m_per_s / guide.cell_m) + 20;
  const int source = reach, reading = source + 4;
  Problem with_layer = guide.problem(reading + gap, table);
  guide.add_source(with_layer, source, pulse);
  Problem without = guide.problem(reading + reach, {});
  guide.add_source(without, source, pulse);
  const Complex incident = mode_amplitude(without, guide, reading, steps, omega);
  const Complex total = mode_amplitude(with_layer, guide, reading, steps, omega);
  const double w = lattice_omega(omega, dt) / c0_m_per_s;
  return {db(std::abs(total - incident) / std::abs(incident)),
          db(std::abs(product(table, guide.cell_m, dt, omega, w * w - guide.kt() * guide.kt())))};
}

}  // namespace

TEST_CASE("A Moebius layer reflects the product of its cells and nothing else", "[moebius][shell]") {
  Guide guide;
  const auto axes = GENERATE(std::pair{Axis::z, Axis::x}, std::pair{Axis::x, Axis::z},
                             std::pair{Axis::y, Axis::x}, std::pair{Axis::z, Axis::y});
  guide.along = axes.first;
  guide.across = axes.second;
  guide.high = GENERATE(true, false);
  guide.te = GENERATE(true, false);
  const int cells = GENERATE(1, 3, 8);
  const Measured m = measure(guide, degrees(45.0), random_table(cells, guide.cell_m, 5));
  CAPTURE(name_of(guide.along), name_of(guide.across), guide.high, guide.te, cells, m.measured_db,
          m.expected_db);
  CHECK(std::abs(m.measured_db - m.expected_db) < 0.01);
}
