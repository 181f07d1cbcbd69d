// The reflection of every kind of face against a direct solution of the lattice's own equations, written down
// component by component with the update's coefficients.
#include <Eigen/Dense>
#include <catch2/catch.hpp>
#include <complex>
#include <random>

#include "geometry/constants.hpp"
#include "solver/media_rows.hpp"
#include "solver/shell/continuum_reflection.hpp"
#include "solver/shell/lattice_reflection.hpp"
#include "solver/shell/stretch.hpp"
#include "tests/solver/setup.hpp"

using namespace wanewall;
using namespace wanewall::test;
using Complex = std::complex<double>;

namespace {

constexpr double cell_m = 2e-3;
constexpr double dt_s = 0.57 * cell_m / c0_m_per_s;
constexpr int plain = 6;  // cells in front of the layer

std::mt19937& dice() {
  static std::mt19937 generator(20261201);
  return generator;
}
double between(double lo, double hi) {
  return lo + (hi - lo) * static_cast<double>(dice()()) / 4294967296.0;
}

LayerTable random_layer(int cells) {
  LayerTable t;
  for (int d = 0; d < cells; ++d) {
    for (auto* sigma : {&t.sigma_e_s_per_m, &t.sigma_h_s_per_m}) sigma->push_back(between(0.0, 3.0));
    for (auto* kappa : {&t.kappa_e, &t.kappa_h}) kappa->push_back(between(1.0, 4.0));
    for (auto* alpha : {&t.alpha_e_s_per_m, &t.alpha_h_s_per_m}) alpha->push_back(between(0.0, 0.2));
  }
  return t;
}

MoebiusTable random_moebius(int cells) {
  MoebiusTable t;
  for (int d = 0; d < cells; ++d) {
    t.kappa.push_back(between(0.1, 3.0));
    t.sigma_s_per_m.push_back(between(0.0, 3.0));
    t.alpha_s_per_m.push_back(between(0.0, 0.2));
  }
  return t;
}

/// R from the solution's first two nodes: E_m = P^-m + R P^m P^(-2 plain) ... with the face at node `plain`.
Complex reflection_of(const Eigen::VectorXcd& e_nodes, Complex kn2) {
  const Complex back = std::exp(Complex(0, 1) * wavenumber_of_lattice(kn2, cell_m) * cell_m);
  const Complex a = e_nodes[0], b = e_nodes[1];
  const double n = plain;
  // Forward F P^(n - m), backward F R P^-(n - m): solve from m = 0, 1.
  const Complex p0 = std::pow(back, n), p1 = std::pow(back, n - 1);
  return (b * p0 - a * p1) / (a / p1 - b / p0);
}

/// The update's equation for one field: x g - x d/g = gain (curl), g = exp(j omega dt/2), solved for curl =
/// (...) x, in units where the curl has no c0 dt: (g - decay/g)/gain.
Complex response(double relative, double loss_rate, double omega) {
  const UpdateCoefficients c = update_coefficients(relative, loss_rate, dt_s);
  const Complex g = std::exp(Complex(0.0, 0.5 * omega * dt_s));
  return (g - c.decay / g) / c.gain;
}

/// All four components of one polarisation, every node and half node an unknown of a dense system.
///   te: Et = Ey, Ht = Hx, Hn = Hz.  tm: Et = Ex, Ht = Hy, En = Ez. Tangential variation exp(-j k t) is taken
///   as j K_t on the lattice; stretched differences and extra losses by depth. Fields in units with eta0 = 1.
Complex brute_force(const Face& face, const Medium& medium, const FaceWave& wave, Complex kn2) {
  const int cells = face.cells(), nodes = plain + cells + 1;
  const double omega = wave.omega_rad_per_s;
  const Complex kt = std::sqrt(wave.transverse_k_squared_per_m2);
  const bool te = wave.polarisation == Polarisation::te;
  const auto loss = [&](bool node, int index) {
    const int d = index - plain;
    if (face.kind != FaceKind::matched_slab || d < 0 || d >= cells) return 0.0;
    return (node ? face.layer.sigma_e_s_per_m : face.layer.sigma_h_s_per_m)[static_cast<std::size_t>(d)] /
           eps0_f_per_m;
  };
  const auto stretch = [&](bool node, int index) -> Complex {  // 1/s
    const int d = index - plain;
    if (face.kind != FaceKind::cfs_pml || d < 0 || d >= cells) return 1.0;
    const auto at = static_cast<std::size_t>(d);
    const LayerTable& t = face.layer;
    const double kappa = (node ? t.kappa_e : t.kappa_h)[at];
    const Recursion r = layer_recursion((node ? t.sigma_e_s_per_m : t.sigma_h_s_per_m)[at], kappa,
                                        (node ? t.alpha_e_s_per_m : t.alpha_h_s_per_m)[at], 1.0, dt_s);
    return 1.0 / kappa + r.c_per_m / (1.0 - r.b * std::exp(Complex(0.0, -omega * dt_s)));
  };
  const auto electric = [&](bool node, int i) {
    return response(medium.permittivity_rel,
                    medium.conductivity_s_per_m / (eps0_f_per_m * medium.permittivity_rel) + loss(node, i),
                    omega);
  };
  const auto magnetic = [&](bool node, int i) {
    return response(
        medium.permeability_rel,
        medium.magnetic_conductivity_ohm_per_m / (mu0_h_per_m * medium.permeability_rel) + loss(node, i),
        omega);
  };
  // Unknowns: Et at nodes, Ht at half nodes, and the normal component at nodes (te: Hn) or half nodes (tm:
  // En).
  const int normals = te ? nodes : nodes - 1;
  const int n = nodes + (nodes - 1) + normals;
  const auto et = [&](int i) { return i; };
  const auto ht = [&](int i) { return nodes + i; };
  const auto xn = [&](int i) { return nodes + nodes - 1 + i; };
  Eigen::MatrixXcd m = Eigen::MatrixXcd::Zero(n, n);
  Eigen::VectorXcd rhs = Eigen::VectorXcd::Zero(n);
  const Complex jkt = Complex(0, 1) * kt;
  m(et(0), et(0)) = 1.0;  // the driven end
  rhs[et(0)] = 1.0;
  m(et(nodes - 1), et(nodes - 1)) = 1.0;  // the wall
  for (int i = 1; i < nodes - 1; ++i) {
    // electric Et = d_n Ht (+ tangential difference of Hn for te)
    m(et(i), et(i)) = electric(true, i);
    const Complex s = stretch(true, i) / cell_m;
    m(et(i), ht(i)) -= s;
    m(et(i), ht(i - 1)) += s;
    if (te) m(et(i), xn(i)) -= jkt;
  }
  for (int i = 0; i < nodes - 1; ++i) {
    // magnetic Ht = d_n Et (+ tangential difference of En for tm)
    m(ht(i), ht(i)) = magnetic(false, i);
    const Complex s = stretch(false, i) / cell_m;
    m(ht(i), et(i + 1)) -= s;
    m(ht(i), et(i)) += s;
    if (!te) m(ht(i), xn(i)) -= jkt;
  }
  for (int i = 0; i < normals; ++i) {
    m(xn(i), xn(i)) = te ? magnetic(true, i) : electric(false, i);
    m(xn(i), te ? et(i) : ht(i)) = -jkt;
  }
  return reflection_of(m.fullPivLu().solve(rhs).head(2), kn2);
}

/// A Moebius column: -K_n^2 d^2 (M E)_j = (delta S^-1 delta E)_j with
///   (M E)_j = 1/4 [s_j (E_j + E_j+1) - (E_j+1 - E_j)/s_j + s_j-1 (E_j-1 + E_j) + (E_j - E_j-1)/s_j-1].
Complex brute_force_moebius(const MoebiusTable& table, double omega, Complex kn2) {
  const int nodes = plain + table.cells() + 1;
  const Complex z_inverse = std::exp(Complex(0.0, -omega * dt_s));
  const Complex p = 2.0 / dt_s * (1.0 - z_inverse) / (1.0 + z_inverse);
  const auto s = [&](int element) -> Complex {
    if (element < plain) return 1.0;
    const auto d = static_cast<std::size_t>(element - plain);
    return table.kappa[d] + table.sigma_s_per_m[d] / (table.alpha_s_per_m[d] + eps0_f_per_m * p);
  };
  Eigen::MatrixXcd m = Eigen::MatrixXcd::Zero(nodes, nodes);
  Eigen::VectorXcd rhs = Eigen::VectorXcd::Zero(nodes);
  m(0, 0) = rhs[0] = 1.0;
  m(nodes - 1, nodes - 1) = 1.0;
  const Complex l = kn2 * cell_m * cell_m;
  for (int i = 1; i < nodes - 1; ++i) {
    const Complex sa = s(i - 1), sb = s(i);
    m(i, i - 1) = 1.0 / sa + 0.25 * l * (sa - 1.0 / sa);
    m(i, i) = -1.0 / sa - 1.0 / sb + 0.25 * l * (sa + 1.0 / sa + sb + 1.0 / sb);
    m(i, i + 1) = 1.0 / sb + 0.25 * l * (sb - 1.0 / sb);
  }
  return reflection_of(m.fullPivLu().solve(rhs).head(2), kn2);
}

/// Vacuum, a dielectric, a lossy one with magnetic properties too.
Medium medium_number(int n) {
  if (n == 0) return {"vacuum", 1.0, 1.0, 0.0, 0.0, false, false};
  if (n == 1) return {"glass", 4.0, 1.0, 0.0, 0.0, false, false};
  return {"loam", 3.0, 1.5, 0.2, 900.0, false, false};
}

constexpr double omega_for(double cells_per_wavelength) {
  return 2.0 * pi * c0_m_per_s / (cells_per_wavelength * cell_m);
}

}  // namespace

TEST_CASE("Layers reflect what their own equations give, solved directly", "[shell][reflection]") {
  const Medium medium = medium_number(GENERATE(0, 1, 2));
  const Polarisation polarisation = GENERATE(Polarisation::te, Polarisation::tm);
  const FaceKind kind = GENERATE(FaceKind::cfs_pml, FaceKind::matched_slab, FaceKind::moebius);
  for (int round = 0; round < 6; ++round) {
    const double omega = omega_for(between(8.0, 60.0));
    const bool evanescent = round >= 4;
    const FaceWave wave =
        evanescent ? wave_that_decays(medium, omega, dt_s, between(0.05, 0.5) / cell_m, cell_m, polarisation)
                   : wave_at_angle(medium, omega, dt_s, degrees(between(0.0, 85.0)), polarisation);
    const Complex kn2 =
        lattice_medium(medium, omega, dt_s).k_squared_per_m2() - wave.transverse_k_squared_per_m2;
    Face face;
    face.kind = kind;
    if (kind == FaceKind::moebius)
      face.moebius = random_moebius(3 + round);
    else
      face.layer = random_layer(3 + round);
    const Complex expected = kind == FaceKind::moebius ? brute_force_moebius(face.moebius, omega, kn2)
                                                       : brute_force(face, medium, wave, kn2);
    const Complex found = face_reflection(face, medium, cell_m, dt_s, wave);
    CAPTURE(medium.name, name_of(kind), index_of(polarisation), round, found, expected);
    CHECK(std::abs(found - expected) < 1e-9);
  }
}

TEST_CASE("A decaying wave falls as it was asked to", "[shell][reflection]") {
  const double decay = 0.3 / cell_m;
  const Medium medium = medium_number(0);
  const FaceWave wave = wave_that_decays(medium, omega_for(20.0), dt_s, decay, cell_m, Polarisation::te);
  const Complex k = wavenumber_of_lattice(
      lattice_medium(medium, omega_for(20.0), dt_s).k_squared_per_m2() - wave.transverse_k_squared_per_m2,
      cell_m);
  CHECK(k.imag() == Approx(-decay));
  CHECK(std::abs(k.real()) < 1e-9 * decay);
}

namespace {

/// The reflection of a one-way wall by stepping the field itself: incident and reflected modes are put into
/// the update at three times, and the update must hold. Plain in space along the wall: three nodes with the
/// exact phases of a real K_t.
double residual(int order, const Medium& medium, double omega, Complex kn2, double kt_per_m, Complex r) {
  const double d = cell_m,
               step = c0_m_per_s * dt_s / std::sqrt(medium.permittivity_rel * medium.permeability_rel);
  const Complex k = wavenumber_of_lattice(kn2, d);
  const double k_along = 2.0 / d * std::asin(0.5 * kt_per_m * d);
  const auto e = [&](int inside, int along, int n) {
    const Complex forward = std::exp(Complex(0, 1) * k * (inside * d));
    return (forward + r / forward) * std::exp(Complex(0.0, omega * n * dt_s - k_along * along * d));
  };
  const double a = (step - d) / (step + d);
  if (order == 1) return std::abs(e(0, 0, 1) - (e(1, 0, 0) + a * (e(1, 0, 1) - e(0, 0, 0))));
  const auto sum = [&](int along) { return e(0, along, 0) + e(1, along, 0); };
  const Complex second = (sum(1) - 2.0 * sum(0) + sum(-1)) / (d * d);
  return std::abs(e(0, 0, 1) -
                  (-e(1, 0, -1) + a * (e(1, 0, 1) + e(0, 0, -1)) + 2.0 * d / (step + d) * sum(0) +
                   d * step * step / (2.0 * (step + d)) * second));
}

}  // namespace

TEST_CASE("One-way walls reflect what makes their update hold", "[shell][reflection]") {
  const int order = GENERATE(1, 2);
  const Medium medium = medium_number(GENERATE(0, 1));
  const double theta = degrees(GENERATE(0.0, 30.0, 60.0, 80.0));
  const double omega = omega_for(25.0);
  const FaceWave wave = wave_at_angle(medium, omega, dt_s, theta, Polarisation::te);
  const Complex kn2 =
      lattice_medium(medium, omega, dt_s).k_squared_per_m2() - wave.transverse_k_squared_per_m2;
  const Complex r = one_way_reflection(order, medium, cell_m, dt_s, wave);
  const double kt = std::sqrt(wave.transverse_k_squared_per_m2.real());
  CAPTURE(order, medium.name, theta, r);
  CHECK(residual(order, medium, omega, kn2, kt, r) < 1e-12);
  CHECK(residual(order, medium, omega, kn2, kt, r + 1e-3) > 1e-6);
  // Near the one-way wave equation's own value in the continuum, ((1 - cos)/(1 + cos))^order.
  //   Source: B. Engquist and A. Majda, Math. Comput. 31, 629 (1977) (from memory).
  const double c = std::cos(theta);
  CHECK(std::abs(r) == Approx(std::pow((1.0 - c) / (1.0 + c), order)).margin(0.02));
}

TEST_CASE("The continuum's value of a polynomial layer is Berenger's formula", "[shell][reflection]") {
  const Medium vacuum = medium_number(0);
  const double order = GENERATE(2.0, 3.0);
  PolynomialGrading grading;
  grading.order = order;
  grading.sigma_max_s_per_m = 0.7;
  Face face;
  face.kind = FaceKind::cfs_pml;
  face.layer = polynomial_layer(grading, 8);
  const double omega = omega_for(20.0), k2 = continuum_k_squared(vacuum, omega).real();
  for (const double theta : {0.0, degrees(40.0), degrees(80.0)}) {
    const double c = std::cos(theta);
    const double expected = std::exp(-2.0 * eta0_ohm * 0.7 * 8 * cell_m * c / (order + 1.0));
    CHECK(std::abs(continuum_reflection(face, vacuum, cell_m, omega, k2 * c * c)) ==
          Approx(expected).epsilon(1e-9));
  }
}

TEST_CASE("On a fine lattice the exact reflection becomes the continuum's", "[shell][reflection]") {
  const FaceKind kind =
      GENERATE(FaceKind::cfs_pml, FaceKind::matched_slab, FaceKind::moebius, FaceKind::one_way);
  const Medium glass = medium_number(1);
  // A slab reflects inside at oblique incidence, which the formula leaves out.
  const double thickness_m = 16e-3, theta = kind == FaceKind::matched_slab ? 0.0 : degrees(40.0);
  const double omega = omega_for(40.0);
  const auto difference = [&](int cells) {
    const double d = thickness_m / cells, dt = 0.5 * d / c0_m_per_s;
    Face face;
    face.kind = kind;
    PolynomialGrading grading;
    grading.order = 2.0;
    grading.sigma_max_s_per_m = 0.05;
    face.layer = polynomial_layer(grading, cells);
    if (kind == FaceKind::moebius)
      face.moebius = {std::vector<double>(cells, 1.0), std::vector<double>(cells, 0.02),
                      std::vector<double>(cells, 0.001)};
    const FaceWave wave = wave_at_angle(glass, omega, dt, theta, Polarisation::te);
    const double c = std::cos(theta);
    const Complex continuum =
        continuum_reflection(face, glass, d, omega, continuum_k_squared(glass, omega) * c * c);
    return std::abs(std::abs(face_reflection(face, glass, d, dt, wave)) - std::abs(continuum));
  };
  CAPTURE(name_of(kind), difference(50), difference(800));
  CHECK(difference(800) < 2e-4);
}
