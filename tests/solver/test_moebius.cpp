// Moebius layers: silent interface, R = -product of squared cell factors, on every axis, with corners.
#include <Eigen/Dense>
#include <catch2/catch.hpp>
#include <complex>
#include <random>
#include <span>

#include "solver/shell/column_run.hpp"
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

}  // namespace

TEST_CASE("A Moebius layer reflects the product of its cells and nothing else", "[moebius][shell]") {
  ColumnRequest request;
  // Long rows make short runs: along x and y the guide's width lies along z.
  const auto axes =
      GENERATE(std::pair{Axis::z, Axis::x}, std::pair{Axis::x, Axis::z}, std::pair{Axis::y, Axis::z});
  request.along = axes.first;
  request.across = axes.second;
  request.high = GENERATE(true, false);
  request.polarisation = GENERATE(Polarisation::te, Polarisation::tm);
  request.angle_rad = degrees(45.0);
  const int cells = 5;
  request.face.kind = FaceKind::moebius;
  request.face.moebius = random_table(cells, request.cell_m, 5);
  const ColumnReading reading = read_column(request);
  const Complex expected =
      product(request.face.moebius, request.cell_m, reading.dt_s, reading.wave.omega_rad_per_s,
              std::pow(lattice_omega(reading.wave.omega_rad_per_s, reading.dt_s) / c0_m_per_s, 2) -
                  reading.wave.transverse_k_squared_per_m2);
  CAPTURE(name_of(request.along), name_of(request.across), request.high, cells, db(std::abs(expected)));
  CHECK(std::abs(reading.reflection - expected) < 1e-6 * std::abs(expected));
}

namespace {

/// A vacuum cube of `clear` cells behind the same Moebius table on every face.
Problem cube(int clear, const MoebiusTable& table, double courant) {
  const int n = clear + 2 * table.cells();
  Problem p = vacuum_problem({n, n, n}, {1e-3, 1e-3, 1e-3}, courant);
  for (Side side : all_sides) set_moebius(p, side, table);
  return p;
}

void add_pulse(Problem& p) {
  Dipole dipole;
  const double middle = 0.5 * p.lattice.cells(Axis::x) * 1e-3;
  dipole.position_m = {middle + 0.3e-3, middle - 0.2e-3, middle + 1.1e-3};
  dipole.moment = {1.0, -0.5, 2.0};
  dipole.pulse.centre_hz = 15e9;
  dipole.pulse.width_s = 20e-12;
  dipole.pulse.delay_s = 6.0 * dipole.pulse.width_s;
  p.dipoles.push_back(dipole);
}

std::vector<double> clear_fields(const Problem& p, long steps) {
  Marcher<double> marcher(p, 1);
  marcher.advance(steps, {});
  std::vector<double> all;
  for (Component c : all_components) {
    const IndexRange x = p.lattice.clear(c, Axis::x), y = p.lattice.clear(c, Axis::y),
                     z = p.lattice.clear(c, Axis::z);
    for (int i = x.begin; i < x.end; ++i)
      for (int j = y.begin; j < y.end; ++j)
        all.insert(all.end(), marcher.fields().row(c, i, j) + z.begin, marcher.fields().row(c, i, j) + z.end);
  }
  return all;
}

double largest(const std::vector<double>& values) {
  double most = 0.0;
  for (double v : values) most = std::max(most, std::abs(v));
  return most;
}

double largest_difference(std::vector<double> a, const std::vector<double>& b) {
  REQUIRE(a.size() == b.size());
  for (std::size_t n = 0; n < a.size(); ++n) a[n] -= b[n];
  return largest(a);
}

}  // namespace

TEST_CASE("The order of a Moebius layer's cells changes nothing beyond rounding", "[moebius]") {
  MoebiusTable table = random_table(5, 1e-3, 11);
  Problem p = cube(6, table, 0.99);
  add_pulse(p);
  const std::vector<double> one = clear_fields(p, 260);
  const auto turn = [](std::vector<double>& v) { std::rotate(v.begin(), v.begin() + 2, v.end()); };
  for (Side side : {Side::x_lo, Side::y_hi, Side::z_hi}) {
    Face& face = p.faces[static_cast<std::size_t>(index_of(side))];
    turn(face.moebius.kappa);
    turn(face.moebius.sigma_s_per_m);
    turn(face.moebius.alpha_s_per_m);
  }
  const std::vector<double> other = clear_fields(p, 260);
  // Rounding is a part of the largest field there was, not of what is left in the end.
  const double scale = largest(clear_fields(p, 80));
  CAPTURE(scale, largest(one), largest_difference(one, other));
  CHECK(largest(one) > 1e-9 * scale);
  CHECK(largest_difference(one, other) < 1e-13 * scale);
}

TEST_CASE("Moebius cells that neither stretch nor absorb are plain lattice", "[moebius]") {
  const MoebiusTable table = table_of({1, 1, 1, 1}, {0, 0, 0, 0}, {0, 0, 0, 0}, 1e-3);
  Problem with = cube(6, table, 0.99);
  add_pulse(with);
  Problem plain = with;
  for (Side side : all_sides)
    plain.faces[static_cast<std::size_t>(index_of(side))] = {FaceKind::electric_wall, {}, {}, 1};
  const std::vector<double> a = clear_fields(with, 200), b = clear_fields(plain, 200);
  CHECK(largest_difference(a, b) < 1e-13 * largest(a));
}

TEST_CASE("The whole step of a box of Moebius corners has no growing mode at 0.9999 of the Courant limit",
          "[moebius]") {
  // 3 cells along each axis, one or two of them layer cells of one side or both: faces, edges and corners.
  const unsigned seed = GENERATE(3u, 4u);
  Problem p = vacuum_problem({3, 3, 3}, {1e-3, 1e-3, 1e-3}, 0.9999);
  p.threads = 1;
  for (Side side : all_sides)
    set_moebius(p, side, random_table(1, 1e-3, seed + static_cast<unsigned>(index_of(side))));
  Marcher<double> marcher(p, 1);
  const std::vector<std::span<double>> state = marcher.state();
  std::vector<double*> values;
  for (const auto& part : state)
    for (double& v : part) values.push_back(&v);
  // Which of the values take part: those that a shaken lattice moves.
  std::mt19937 random(seed);
  std::uniform_real_distribution<double> uniform(-1.0, 1.0);
  const auto inside = [&](Component c, Axis a) {  // tangential E on the outer walls is zero from the start
    IndexRange range = p.lattice.stored(c, a);
    return is_electric(c) && !is_half(c, a) ? IndexRange{range.begin + 1, range.end - 1} : range;
  };
  for (Component c : all_components)
    for (int i = inside(c, Axis::x).begin; i < inside(c, Axis::x).end; ++i)
      for (int j = inside(c, Axis::y).begin; j < inside(c, Axis::y).end; ++j)
        for (int k = inside(c, Axis::z).begin; k < inside(c, Axis::z).end; ++k)
          marcher.fields().row(c, i, j)[k] = uniform(random);
  marcher.advance(4, {});
  std::vector<double*> alive;
  for (double* v : values)
    if (*v != 0.0) alive.push_back(v);
  const auto n = static_cast<Eigen::Index>(alive.size());
  Eigen::MatrixXd step(n, n);
  for (Eigen::Index column = 0; column < n; ++column) {
    for (double* v : values) *v = 0.0;
    *alive[static_cast<std::size_t>(column)] = 1.0;
    marcher.advance(1, {});
    for (Eigen::Index row = 0; row < n; ++row) step(row, column) = *alive[static_cast<std::size_t>(row)];
  }
  // An eigenvalue solver would lose half the digits at the many static modes (all at 1). Powers do not: with
  // nothing beyond 1 + 1e-12, the 2^33-th is at most exp(2^33 1e-12) = 1.0086 times the 2^20-th.
  double earlier = 0.0;
  for (int doubling = 0; doubling < 33; ++doubling) {
    if (doubling == 20) earlier = step.norm();
    step = (step * step).eval();
  }
  CAPTURE(n, earlier, step.norm() / earlier);
  CHECK(n > 300);
  CHECK(step.norm() <= 1.0086 * earlier);
}

TEST_CASE("Interior noise does not grow in a Moebius shell", "[moebius]") {
  // A short version; the long ones are in [.long].
  const MoebiusTable table = table_of({.25, .25, .25, .25, .25}, {.9613, 1.5282, 3.1415, 6.4015, 10.6332},
                                      {.003, .003, .003, .003, .003}, 1e-3);
  Problem p = cube(6, table, 0.9999);
  Marcher<double> marcher(p, 2);
  std::mt19937 random(1);
  std::uniform_real_distribution<double> uniform(-0.5, 0.5);
  for (Component c : all_components)
    for (int i = 6; i < 10; ++i)
      for (int j = 6; j < 10; ++j)
        for (int k = 6; k < 10; ++k) marcher.fields().row(c, i, j)[k] = uniform(random);
  double early = 0.0, late = 0.0;
  for (int part = 0; part < 20; ++part) {
    marcher.advance(100, {});
    (part < 10 ? early : late) = std::max(part < 10 ? early : late, marcher.clear_energy_j());
  }
  CAPTURE(early, late);
  CHECK(early > 0.0);
  CHECK(late < 1.001 * early);
}

namespace {

template <class Real>
void noise_for(long steps) {
  const MoebiusTable table = table_of({.25, .25, .25, .25, .25, .25, .25, .25},
                                      {.9968, .9968, 1.5532, 2.4405, 3.8906, 6.0795, 8.856, 11.1301},
                                      std::vector<double>(8, 1e-3), 1e-3);
  Problem p = cube(8, table, 0.9999);
  Marcher<Real> marcher(p, 2);
  std::mt19937 random(1);
  std::uniform_real_distribution<double> uniform(-0.5, 0.5);
  for (Component c : all_components)
    for (int i = 8; i < 16; ++i)
      for (int j = 8; j < 16; ++j)
        for (int k = 8; k < 16; ++k) marcher.fields().row(c, i, j)[k] = static_cast<Real>(uniform(random));
  double settled = 0.0;
  for (long done = 0; done < steps; done += 1000) {
    marcher.advance(1000, {});
    const double joule = marcher.clear_energy_j();
    if (done == 1000) settled = joule;
    if (done % 10000 == 0) WARN(done + 1000 << " steps: " << joule << " J in the clear volume");
    if (done > 1000) REQUIRE(joule < 1.01 * settled);
  }
}

}  // namespace

TEST_CASE("Interior noise for 100 000 steps in double precision", "[.long]") {
  noise_for<double>(100000);
}
TEST_CASE("Interior noise for 50 000 steps in single precision", "[.long]") {
  noise_for<float>(50000);
}
