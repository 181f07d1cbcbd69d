// Comparison of two runs, against differences that were put in by hand.
#include <catch2/catch.hpp>
#include <cmath>
#include <complex>
#include <limits>
#include <stdexcept>

#include "postproc/compare.hpp"

using namespace wanewall;

namespace {

constexpr double dt_s = 2e-12;
const std::vector<double> band_hz{1e9, 2e9, 4e9};

/// 12 x 10 x 8 clear cells of 1 mm from the origin on, in a shell of `shell` cells.
Lattice box_lattice(int shell) {
  Lattice lattice;
  const std::array<int, 3> clear{12, 10, 8};
  for (std::size_t a = 0; a < 3; ++a)
    lattice.lines[a] = MeshLines::uniform(-shell * 1e-3, 1e-3, clear[a] + 2 * shell);
  lattice.shell_cells.fill(shell);
  lattice.dt_s = dt_s;
  return lattice;
}

/// All six components are pulses; the largest |E| is 5 V/m and the largest |H| 13 A/m, both at step 40.
PointSeries pulse_at(const std::string& name, const Vec3& position_m) {
  PointSeries point{name, position_m, {}};
  const std::array<double, 6> peak{3.0, 4.0, 0.0, 5.0, 0.0, 12.0};
  for (std::size_t c = 0; c < 6; ++c)
    for (int n = 0; n < 100; ++n)
      point.values[c].push_back(peak[c] * std::exp(-0.5 * std::pow((n - 40) / 8.0, 2)));
  return point;
}

RunResult one_point() {
  RunResult result;
  result.points = {pulse_at("probe", {3e-3, 4e-3, 5e-3})};
  return result;
}

std::complex<double> sum_at(const Vec3& p_m, std::size_t frequency) {
  const double phase = 1e3 * (0.7 * p_m[0] + 0.3 * p_m[1] - 0.2 * p_m[2]);
  return std::complex<double>(std::polar(1e-9 * (1.0 + static_cast<double>(frequency)), phase));
}

/// Ey on the plane x = 10 mm of the face x+, known everywhere, shell included, and wrong within the shell.
AuditFace x_face(const Lattice& lattice, double in_shell) {
  AuditFace face;
  face.side = Side::x_hi;
  AuditPlane plane;
  plane.component = Component::ey;
  plane.normal_index = lattice.along(Axis::x).nearest_node(10e-3);
  plane.normal_m = lattice.along(Axis::x).node_m(plane.normal_index);
  plane.shape = {lattice.stored(Component::ey, Axis::y).size(),
                 lattice.stored(Component::ey, Axis::z).size()};
  for (std::size_t f = 0; f < band_hz.size(); ++f)
    for (int j = 0; j < plane.shape[0]; ++j)
      for (int k = 0; k < plane.shape[1]; ++k) {
        const bool clear = lattice.clear(Component::ey, Axis::y).contains(j) &&
                           lattice.clear(Component::ey, Axis::z).contains(k);
        const auto value = sum_at(lattice.position_m(Component::ey, {plane.normal_index, j, k}), f);
        plane.sums.push_back(clear ? value : value + std::complex<double>(in_shell));
      }
  face.planes.push_back(plane);
  return face;
}

AuditRecord x_audit(const Lattice& lattice, double in_shell) {
  AuditRecord audit;
  audit.frequencies_hz = band_hz;
  audit.faces = {x_face(lattice, in_shell)};
  return audit;
}

}  // namespace

TEST_CASE("A change at one step is read with its size, its time and its part of the peak", "[compare]") {
  const Lattice lattice = box_lattice(2);
  const RunResult reference = one_point();
  RunResult run = reference;
  run.points[0].values[0][70] += 3e-4;
  run.points[0].values[2][70] -= 4e-4;
  run.points[0].values[3][12] += 1.3e-3;
  const Comparison c = compare({lattice, reference}, {lattice, run}, band_hz);
  REQUIRE(c.points.size() == 1);
  CHECK(c.notes.empty());
  CHECK(c.steps == 100);
  const FieldError &e = c.points[0].e, &h = c.points[0].h;
  CHECK(e.reference_peak == Approx(5.0));
  CHECK(e.largest_change == Approx(5e-4));
  CHECK(e.largest_at_s == Approx(70 * dt_s));
  CHECK(e.peak_db == Approx(-80.0));
  CHECK(h.reference_peak == Approx(13.0));
  CHECK(h.peak_db == Approx(-80.0));
  CHECK(h.largest_at_s == Approx(12.5 * dt_s));
  CHECK(e.change[69] == 0.0);
  CHECK(worst_peak_db(c) == Approx(-80.0));
}

TEST_CASE("A scaled field has that error at every frequency and in the mean", "[compare]") {
  const Lattice lattice = box_lattice(2);
  const RunResult reference = one_point();
  RunResult run = reference;
  for (auto& values : run.points[0].values)
    for (double& v : values) v *= 1.001;
  const Comparison c = compare({lattice, reference}, {lattice, run}, band_hz);
  for (const FieldError* error : {&c.points[0].e, &c.points[0].h}) {
    CHECK(error->rms_db == Approx(-60.0).margin(1e-6));
    CHECK(error->peak_db == Approx(-60.0).margin(1e-6));
    REQUIRE(error->spectrum_db.size() == band_hz.size());
    for (const double db : error->spectrum_db) CHECK(db == Approx(-60.0).margin(1e-6));
    CHECK(worst_in_band_db(*error) == Approx(-60.0).margin(1e-6));
  }
}

TEST_CASE("The error in the band is that of the band alone", "[compare]") {
  const Lattice lattice = box_lattice(2);
  const RunResult reference = one_point();
  RunResult run = reference;
  // An alternating error is far above the band: (-1)^n (1, -2, 1) has next to nothing at 4 GHz dt = 0.008.
  for (std::size_t n = 10; n < 90; ++n) run.points[0].values[0][n] += 0.05 * (n % 2 == 0 ? 1.0 : -1.0);
  const Comparison c = compare({lattice, reference}, {lattice, run}, band_hz);
  CHECK(c.points[0].e.peak_db == Approx(-40.0));
  CHECK(worst_in_band_db(c.points[0].e) < -60.0);
}

TEST_CASE("Runs of different length are compared where both exist", "[compare]") {
  const Lattice lattice = box_lattice(2);
  const RunResult reference = one_point();
  RunResult run = reference;
  for (auto& values : run.points[0].values) values.resize(60);
  const Comparison c = compare({lattice, reference}, {lattice, run}, band_hz);
  CHECK(c.steps == 60);
  REQUIRE(c.notes.size() == 1);
  CHECK_THAT(c.notes[0], Catch::Contains("60 samples against 100"));
  CHECK(worst_peak_db(c) == -std::numeric_limits<double>::infinity());
  // The spectra are of the same window, so that a scaled field has that error in the band as well.
  for (auto& values : run.points[0].values)
    for (double& v : values) v *= 1.001;
  const Comparison scaled = compare({lattice, reference}, {lattice, run}, band_hz);
  for (const double db : scaled.points[0].e.spectrum_db) CHECK(db == Approx(-60.0).margin(1e-6));
}

TEST_CASE("What cannot be compared is told and left out", "[compare]") {
  const Lattice lattice = box_lattice(2);
  RunResult reference = one_point(), run = reference;
  reference.points.push_back(pulse_at("moved", {1e-3, 1e-3, 1e-3}));
  reference.points.push_back(pulse_at("only here", {1e-3, 1e-3, 1e-3}));
  run.points.push_back(pulse_at("moved", {1e-3, 1e-3, 1.01e-3}));
  const Comparison c = compare({lattice, reference}, {lattice, run}, band_hz);
  CHECK(c.points.size() == 1);
  CHECK(c.notes.size() == 2);

  Lattice slower = lattice;
  slower.dt_s *= 1.0001;
  CHECK_THROWS_AS(compare({lattice, reference}, {slower, run}, band_hz), std::invalid_argument);

  Lattice shifted = lattice;
  shifted.lines[1] = MeshLines::uniform(-2.3e-3, 1e-3, 14);
  const Comparison off = compare({lattice, one_point()}, {shifted, one_point()}, band_hz);
  REQUIRE(off.notes.size() == 1);
  CHECK_THAT(off.notes[0], Catch::Contains("mesh lines"));

  // A point in the middle of a cell has two nearest nodes; which of them rounding picks does not matter.
  Lattice nudged = lattice;
  for (auto& lines : nudged.lines) lines = MeshLines::uniform(-5e-3 * (1.0 + 1e-15), 1e-3, lines.cells() + 6);
  RunResult half;
  half.points = {pulse_at("half", {3.5e-3, 2.5e-3, 5.5e-3})};
  CHECK(compare({lattice, half}, {nudged, half}, band_hz).notes.empty());
}

TEST_CASE("A difference that is not finite, or from nothing, never passes for a small one", "[compare]") {
  const Lattice lattice = box_lattice(2);
  const RunResult reference = one_point();
  RunResult broken = reference;
  broken.points[0].values[0][50] = std::numeric_limits<double>::quiet_NaN();
  const Comparison c = compare({lattice, reference}, {lattice, broken}, band_hz);
  CHECK(worst_peak_db(c) == std::numeric_limits<double>::infinity());
  CHECK(c.points[0].e.rms_db == std::numeric_limits<double>::infinity());
  CHECK(worst_in_band_db(c.points[0].e) == std::numeric_limits<double>::infinity());
  CHECK(c.points[0].e.largest_at_s == Approx(50 * dt_s));

  RunResult silent = reference;
  for (auto& values : silent.points[0].values)
    for (double& v : values) v = 0.0;
  CHECK(worst_peak_db(compare({lattice, silent}, {lattice, reference}, band_hz)) ==
        std::numeric_limits<double>::infinity());
  CHECK(worst_peak_db(compare({lattice, silent}, {lattice, silent}, band_hz)) ==
        -std::numeric_limits<double>::infinity());
}

TEST_CASE("Audit planes are compared inside the clear cross-section, whatever the shells", "[compare]") {
  const Lattice thin = box_lattice(3), thick = box_lattice(9);
  RunResult reference, run;
  reference.audit = x_audit(thick, 1.0);
  run.audit = x_audit(thin, -1.0);
  const Comparison same = compare({thick, reference}, {thin, run}, band_hz);
  REQUIRE(same.faces.size() == 1);
  CHECK(same.faces[0].side == Side::x_hi);
  for (const double db : same.faces[0].e_db) CHECK(db < -250.0);

  for (auto& sum : run.audit.faces[0].planes[0].sums) sum *= 1.01f;
  const Comparison c = compare({thick, reference}, {thin, run}, band_hz);
  for (std::size_t f = 0; f < band_hz.size(); ++f) {
    CHECK(c.faces[0].e_db[f] == Approx(-40.0).margin(1e-3));
    CHECK(c.faces[0].e_change_v_s_per_m[f] == Approx(1e-11 * (1.0 + static_cast<double>(f))).epsilon(1e-3));
  }

  // A reference that is larger along y on both sides shares the smaller one's cross-section.
  Lattice wide = thin;
  wide.lines[1] = MeshLines::uniform(-8e-3, 1e-3, 10 + 6 + 12);
  RunResult larger;
  larger.audit = x_audit(wide, 1.0);
  for (const Comparison& either :
       {compare({wide, larger}, {thin, run}, band_hz), compare({thin, run}, {wide, larger}, band_hz)}) {
    REQUIRE(either.faces.size() == 1);
    for (const double db : either.faces[0].e_db) CHECK(db == Approx(-40.0).margin(0.1));
  }

  run.audit.frequencies_hz.back() *= 1.01;
  const Comparison other = compare({thick, reference}, {thin, run}, band_hz);
  CHECK(other.faces.empty());
  CHECK(other.notes.size() == 1);
}

TEST_CASE("Tables of a comparison have a row for each thing that was compared", "[compare]") {
  const Lattice lattice = box_lattice(3);
  RunResult reference = one_point();
  reference.audit = x_audit(lattice, 0.0);
  const RunResult run = reference;
  const Comparison c = compare({lattice, reference}, {lattice, run}, band_hz);
  CHECK(point_error_table(c).rows.size() == 2);
  CHECK(band_error_table(c).rows.size() == 3);
  CHECK(face_error_table(c).rows.size() == 3);
  const Table all = comparison_rows("run.h5", c);
  CHECK(all.rows.size() == 2 * 3 + 2 * 3);
  for (const auto& row : all.rows) CHECK(row.size() == all.columns.size());
  CHECK_THAT(to_markdown(point_error_table(c)), Catch::Contains("equal"));
}
