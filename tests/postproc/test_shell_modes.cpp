#include "postproc/shell_modes.hpp"

#include <catch2/catch.hpp>
#include <cmath>

#include "postproc/lattice_wave.hpp"
#include "tests/solver/setup.hpp"

using namespace wanewall;
using namespace wanewall::test;

namespace {

constexpr double cell_m = 2e-3, frequency_hz = 10e9;

LayerTable graded(int cells) {
  PolynomialGrading grading;
  grading.sigma_max_s_per_m = sigma_max_for_reflection(1e-3, grading.order, cells * cell_m);
  grading.kappa_max = 3.0;
  grading.alpha_max_s_per_m = 0.02;
  return polynomial_layer(grading, cells);
}

MoebiusTable moebius(std::vector<double> g, double kappa) {
  MoebiusTable table;
  for (double value : g) {
    table.kappa.push_back(kappa);
    table.sigma_s_per_m.push_back(2.0 * c0_m_per_s * eps0_f_per_m * value / cell_m);
    table.alpha_s_per_m.push_back(0.01);
  }
  return table;
}

Problem column(int cells) {
  return vacuum_problem({cells, 4, 4}, {cell_m, cell_m, cell_m});
}

void set_moebius(Problem& p, Side side, const MoebiusTable& table) {
  set_face(p, side, FaceKind::moebius);
  p.faces[static_cast<std::size_t>(index_of(side))].moebius = table;
  p.lattice.shell_cells[static_cast<std::size_t>(index_of(side))] = table.cells();
}

AxisDifferences differences(const Problem& p) {
  return axis_differences(p.lattice, p.faces, Axis::x, frequency_hz);
}

/// Largest distance from each of `expected` to its nearest eigenvalue, relative to the largest.
double worst_distance(const Eigen::ArrayXcd& eigenvalues, const std::vector<double>& expected) {
  double worst = 0.0;
  for (double e : expected) worst = std::max(worst, (eigenvalues - e).abs().minCoeff());
  return worst / eigenvalues.abs().maxCoeff();
}

}  // namespace

TEST_CASE("Between walls and on joined sides the modes are the known standing waves", "[shell_modes]") {
  // Eigenvalues of the second difference: -(2/d)^2 sin^2 of half the phase per cell.
  const int n = 11;
  Problem p = column(n);
  const auto eigenvalues = [&](double phase_step, int first, int count) {
    std::vector<double> values;
    for (int m = first; m < first + count; ++m)
      values.push_back(-std::pow(2.0 / cell_m * std::sin(0.5 * phase_step * m), 2));
    return values;
  };
  SECTION("electric walls") {
    const AxisDifferences d = differences(p);
    CHECK(d.nodes == IndexRange{1, n});
    CHECK(worst_distance(node_modes(d).eigenvalue_per_m2, eigenvalues(pi / n, 1, n - 1)) < 1e-12);
    CHECK(worst_distance(half_modes(d).eigenvalue_per_m2, eigenvalues(pi / n, 0, n)) < 1e-12);
  }
  SECTION("an electric and a magnetic wall") {
    set_face(p, Side::x_hi, FaceKind::magnetic_wall);
    const AxisDifferences d = differences(p);
    CHECK(d.nodes == IndexRange{1, n + 1});
    std::vector<double> expected;
    for (int m = 0; m < n; ++m)
      expected.push_back(-std::pow(2.0 / cell_m * std::sin(0.5 * pi * (m + 0.5) / n), 2));
    CHECK(worst_distance(node_modes(d).eigenvalue_per_m2, expected) < 1e-12);
    CHECK(worst_distance(half_modes(d).eigenvalue_per_m2, expected) < 1e-12);
  }
  SECTION("joined sides") {
    set_periodic(p, Axis::x);
    const AxisDifferences d = differences(p);
    CHECK(d.nodes == IndexRange{0, n});
    CHECK(worst_distance(node_modes(d).eigenvalue_per_m2, eigenvalues(2.0 * pi / n, 0, n)) < 1e-12);
  }
}

TEST_CASE("The modes of layers are complete and exact", "[shell_modes]") {
  Problem p = column(60);
  SECTION("cfs_pml") {
    set_face(p, Side::x_lo, FaceKind::cfs_pml, graded(12));
    set_face(p, Side::x_hi, FaceKind::cfs_pml, graded(8));
  }
  SECTION("moebius") {
    set_moebius(p, Side::x_lo, moebius({0.9613, 1.5282, 3.1415, 6.4015, 10.6332}, 0.25));
    set_moebius(p, Side::x_hi, moebius({10.6332, 0.9613, 3.1415, 1.5282, 6.4015}, 0.25));
  }
  SECTION("one of each") {
    set_face(p, Side::x_lo, FaceKind::cfs_pml, graded(12));
    set_moebius(p, Side::x_hi, moebius({0.9613, 1.5282, 3.1415, 6.4015, 10.6332}, 0.25));
  }
  const AxisDifferences d = differences(p);
  const AxisModes nodes = node_modes(d), halves = half_modes(d);
  for (const AxisModes* modes : {&nodes, &halves}) {
    CHECK(modes->reconstruction_error < 1e-10);
    const auto n = modes->modes.rows();
    CHECK((modes->expand * modes->modes - Eigen::MatrixXcd::Identity(n, n)).cwiseAbs().maxCoeff() < 1e-9);
  }
  // D^n D^h and D^h D^n have the same eigenvalues but for zero.
  for (Eigen::Index i = 0; i < nodes.eigenvalue_per_m2.size(); ++i) {
    const double off = (halves.eigenvalue_per_m2 - nodes.eigenvalue_per_m2[i]).abs().minCoeff();
    CHECK(off < 1e-9 * halves.eigenvalue_per_m2.abs().maxCoeff());
  }
}

TEST_CASE("A Moebius layer without stretch is the plain lattice", "[shell_modes]") {
  Problem plain = column(20), with_layer = column(20);
  MoebiusTable table = moebius({0.0, 0.0, 0.0, 0.0}, 1.0);
  set_moebius(with_layer, Side::x_lo, table);
  set_moebius(with_layer, Side::x_hi, table);
  const AxisDifferences a = differences(plain), b = differences(with_layer);
  CHECK((a.to_half - b.to_half).cwiseAbs().maxCoeff() < 1e-12 / cell_m);
  CHECK((a.to_nodes - b.to_nodes).cwiseAbs().maxCoeff() < 1e-12 / cell_m);
}

TEST_CASE("In a uniform profile the layered modes are the plain ones plus W^2", "[shell_modes]") {
  Problem p = column(24);
  set_face(p, Side::x_lo, FaceKind::cfs_pml, graded(6));
  const AxisDifferences d = differences(p);
  const std::size_t n = 24;
  LayeredProfile profile;
  for (auto [relative, size] :
       {std::pair{&profile.permittivity_rel_node, n + 1}, {&profile.permittivity_rel_half, n}})
    relative->assign(size, 2.5);
  profile.conductivity_s_per_m_node.assign(n + 1, 0.02);
  profile.conductivity_s_per_m_half.assign(n, 0.02);
  profile.permeability_rel_node.assign(n + 1, 1.2);
  profile.permeability_rel_half.assign(n, 1.2);
  profile.magnetic_conductivity_ohm_per_m_node.assign(n + 1, 300.0);
  profile.magnetic_conductivity_ohm_per_m_half.assign(n, 300.0);
  const std::complex<double> w2 = face_medium(2.5, 1.2, 0.02, frequency_hz, p.lattice.dt_s, 300.0).w2_per_m2;
  const AxisModes ez = layered_ez_modes(d, profile, frequency_hz, p.lattice.dt_s);
  const AxisModes hz = layered_hz_modes(d, profile, frequency_hz, p.lattice.dt_s);
  const Eigen::ArrayXcd halves = half_modes(d).eigenvalue_per_m2 + w2,
                        nodes = node_modes(d).eigenvalue_per_m2 + w2;
  for (Eigen::Index i = 0; i < halves.size(); ++i)
    CHECK((ez.eigenvalue_per_m2 - halves[i]).abs().minCoeff() < 1e-9 * halves.abs().maxCoeff());
  for (Eigen::Index i = 0; i < nodes.size(); ++i)
    CHECK((hz.eigenvalue_per_m2 - nodes[i]).abs().minCoeff() < 1e-9 * nodes.abs().maxCoeff());
  profile.permittivity_rel_half.pop_back();
  CHECK_THROWS_AS(layered_ez_modes(d, profile, frequency_hz, p.lattice.dt_s), std::invalid_argument);
}

TEST_CASE("Axes without modes of this kind say why", "[shell_modes]") {
  Problem p = column(20);
  CHECK(no_modes_because(p.lattice, p.faces, Axis::x).empty());
  set_face(p, Side::x_hi, FaceKind::matched_slab, graded(4));
  CHECK_THAT(no_modes_because(p.lattice, p.faces, Axis::x), Catch::Contains("matched_slab face x+"));
  CHECK_THROWS_AS(differences(p), std::invalid_argument);
  set_face(p, Side::x_hi, FaceKind::one_way);
  CHECK_THAT(no_modes_because(p.lattice, p.faces, Axis::x), Catch::Contains("one_way face x+"));
  set_face(p, Side::x_hi, FaceKind::cfs_pml, graded(4));
  p.faces[static_cast<std::size_t>(index_of(Side::x_hi))].layer = {};
  CHECK_THAT(no_modes_because(p.lattice, p.faces, Axis::x), Catch::Contains("what the layer of face x+"));
}
