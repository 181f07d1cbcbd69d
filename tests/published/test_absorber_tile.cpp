// The absorber tile case, from scene file to reflectivity, against the exact value of one lossy layer on a
// short.
//   Z = eta tanh(gamma L), R = (Z - eta0)/(Z + eta0).  Source: D. M. Pozar, Microwave Engineering, ch. 2
//   (from memory).
#include <catch2/catch.hpp>
#include <complex>

#include "io/scene.hpp"
#include "postproc/plane_power.hpp"
#include "postproc/reflection_table.hpp"
#include "solver/shell/lattice_reflection.hpp"
#include "tests/solver/setup.hpp"

using namespace wanewall;
using namespace wanewall::test;
using Complex = std::complex<double>;

namespace {

double exact_reflectivity_db(double hz) {
  const double omega = 2.0 * pi * hz, thickness_m = 30e-3;
  const Complex eps(2.2, -0.15 / (omega * eps0_f_per_m));
  const Complex eta = 1.0 / std::sqrt(eps), gamma = Complex(0.0, omega / c0_m_per_s) * std::sqrt(eps);
  const Complex z = eta * std::tanh(gamma * thickness_m);
  return db(std::abs((z - 1.0) / (z + 1.0)));
}

}  // namespace

TEST_CASE("The absorber tile's reflectivity is that of a lossy layer on metal", "[published][tile]") {
  const Scene scene = read_scene(WANEWALL_SOURCE_DIR "/cases/absorber_tile.yaml");
  NoSink sink;
  NoMonitor monitor;
  const RunResult result = run(scene.problem, sink, monitor);
  const AuditReport report = audit_report(result.audit, scene.problem.lattice, {});
  REQUIRE(report.faces.size() == 1);
  REQUIRE(report.faces[0].basis_is_exact);
  double deepest = 0.0;
  for (const FaceReading& reading : report.faces[0].readings) {
    REQUIRE(reading.net);
    REQUIRE(reading.incident_w_s2);
    const double by_net = 10.0 * std::log10(reading.net->clear_w_s2 / *reading.incident_w_s2);
    const double by_split = 10.0 * std::log10(reading.total.outgoing_w_s2 / *reading.incident_w_s2);
    const double exact = exact_reflectivity_db(reading.frequency_hz);
    CAPTURE(reading.frequency_hz, by_net, by_split, exact, reading.total.reflection.value_db);
    CHECK(by_net == Approx(exact).margin(0.1));
    CHECK(by_split == Approx(exact).margin(0.1));
    deepest = std::min(deepest, exact);
  }
  CHECK(deepest < -10.0);
}

TEST_CASE("On exact modes the audit reads what the shell's lattice recursion says", "[published][tile]") {
  Scene scene = read_scene(WANEWALL_SOURCE_DIR "/cases/absorber_tile.yaml");
  const double r0_db = GENERATE(-30.0, -50.0);
  const Lattice& lattice = scene.problem.lattice;
  const double d = lattice.along(Axis::z).cell_m(0);
  Face& face = scene.problem.faces[static_cast<std::size_t>(index_of(Side::z_hi))];
  const int cells = face.layer.cells();
  PolynomialGrading grading;
  grading.sigma_max_s_per_m =
      sigma_max_for_reflection(std::pow(10.0, r0_db / 20.0), grading.order, cells * d);
  face.layer = polynomial_layer(grading, cells);
  NoSink sink;
  NoMonitor monitor;
  const RunResult result = run(scene.problem, sink, monitor);
  const AuditReport report = audit_report(result.audit, lattice, {});
  for (const FaceReading& reading : report.faces.at(0).readings) {
    const double omega = 2.0 * pi * reading.frequency_hz;
    const double w = lattice_omega(omega, lattice.dt_s) / c0_m_per_s;
    const double expected = db(std::abs(layer_reflection(face.layer, d, lattice.dt_s, omega, w * w)));
    CAPTURE(r0_db, reading.frequency_hz, reading.total.reflection.value_db, expected);
    CHECK(reading.total.reflection.kind == Reflection::Kind::value);
    CHECK(reading.total.reflection.value_db == Approx(expected).margin(0.1));
  }
}

TEST_CASE("The empty box case leaks less than it says", "[published][case]") {
  Scene scene = read_scene(WANEWALL_SOURCE_DIR "/cases/empty_box.yaml");
  const auto outside_db = [&](Precision precision) {
    scene.problem.precision = precision;
    NoSink sink;
    NoMonitor monitor;
    const RunResult result = run(scene.problem, sink, monitor);
    double inside = 0.0, outside = 0.0;
    for (const PointSeries& point : result.points)
      for (std::size_t c = 0; c < 3; ++c)
        for (double v : point.values[c]) {
          double& largest = point.name == "inside" ? inside : outside;
          largest = std::max(largest, std::abs(v));
        }
    CHECK(inside > 0.5);
    return db(outside / inside);
  };
  const double double_db = outside_db(Precision::double_precision),
               single_db = outside_db(Precision::single_precision);
  CAPTURE(double_db, single_db);
  CHECK(double_db < -150.0);
  CHECK(single_db < -110.0);
}
