// Recorders against the fields themselves.
#include <catch2/catch.hpp>
#include <complex>

#include "solver/recorders/audit.hpp"
#include "solver/recorders/points.hpp"
#include "solver/recorders/snapshots.hpp"
#include "tests/solver/setup.hpp"

using namespace wanewall;
using namespace wanewall::test;
using Complex = std::complex<double>;

namespace {

struct KeepSnapshots : Sink {
  void take(Snapshot s) override { all.push_back(std::move(s)); }
  std::vector<Snapshot> all;
};

LayerTable layer(int cells) {
  PolynomialGrading grading;
  grading.sigma_max_s_per_m = sigma_max_rule(3.0, 1e-3, 1.0);
  grading.alpha_max_s_per_m = 0.01;
  return polynomial_layer(grading, cells);
}

/// A box of 1 mm cells with a dipole in it and absorbing faces.
Problem lit_box() {
  Problem p = vacuum_problem({20, 18, 22}, {1e-3, 1e-3, 1e-3});
  for (Side s : all_sides) set_face(p, s, FaceKind::cfs_pml, layer(5));
  Pulse pulse;
  pulse.centre_hz = 15e9;
  pulse.width_s = 20e-12;
  pulse.delay_s = 60e-12;
  p.dipoles.push_back({false, {9.2e-3, 8.7e-3, 11.4e-3}, {1e-3, -2e-3, 1.5e-3}, pulse});
  return p;
}

}  // namespace

TEST_CASE("A point on a lattice position reads it, one between reads the mean", "[recorders]") {
  const Problem p = lit_box();
  Marcher<double> marcher(p, 2);
  Captures<double> captures(p.lattice);
  // (9, 9, 11) mm is a node; Ex sits half a cell off along x, Hx half a cell off along y and z.
  PointRecorder<double> points(p.lattice, {{"node", {9e-3, 9e-3, 11e-3}}, {"ez", {9e-3, 9e-3, 11.5e-3}}},
                               captures);
  captures.freeze();
  marcher.attach(&captures);
  const std::vector<Recorder*> recorders{&points};
  std::vector<double> ex, ez, hx;
  for (int n = 0; n < 90; ++n) {
    marcher.advance(1, recorders);
    const auto& f = marcher.fields();
    ex.push_back(0.5 * (f.row(Component::ex, 8, 9)[11] + f.row(Component::ex, 9, 9)[11]));
    ez.push_back(f.row(Component::ez, 9, 9)[11]);
    hx.push_back(0.25 *
                 (f.row(Component::hx, 9, 8)[10] + f.row(Component::hx, 9, 8)[11] +
                  f.row(Component::hx, 9, 9)[10] + f.row(Component::hx, 9, 9)[11]) /
                 eta0_ohm);
  }
  const auto series = points.finish();
  REQUIRE(series[0].values[0].size() == 91);
  CHECK(series[0].values[0][0] == 0.0);
  double largest = 0.0;
  for (std::size_t n = 0; n < 90; ++n) {
    CHECK(series[0].values[0][n + 1] == Approx(ex[n]).epsilon(1e-9).margin(1e-15));
    CHECK(series[1].values[2][n + 1] == Approx(ez[n]).epsilon(1e-9).margin(1e-15));
    CHECK(series[0].values[3][n + 1] == Approx(hx[n]).epsilon(1e-9).margin(1e-18));
    largest = std::max(largest, std::abs(ex[n]));
  }
  CHECK(largest > 1e-3);
}

TEST_CASE("Planes are interpolated to their place, volumes are strided copies", "[recorders]") {
  const Problem p = lit_box();
  Marcher<double> marcher(p, 2);
  Captures<double> captures(p.lattice);
  KeepSnapshots sink;
  const Vec3 lo{5e-3, 5e-3, 5e-3}, hi{15e-3, 13e-3, 17e-3};
  SnapshotRequest plane{"cut", Axis::y, lo, hi, {Component::ey, Component::hx}, 30, 1};
  plane.lo_m[1] = plane.hi_m[1] = 8.25e-3;
  const SnapshotRequest volume{"block", {}, {7e-3, 7e-3, 7e-3}, {11e-3, 10e-3, 12e-3}, {Component::ez},
                               20,      2};
  SnapshotRecorder<double> snapshots(p.lattice, {plane, volume}, captures, sink);
  captures.freeze();
  marcher.attach(&captures);
  marcher.advance(60, {&snapshots});
  // Steps 20 (block), 30 (cut: Ey, Hx), 40 (block), 60 (cut, block).
  REQUIRE(sink.all.size() == 7);
  const auto& f = marcher.fields();
  for (const Snapshot& s : sink.all) {
    if (s.step != 60) continue;
    const auto& values = std::get<std::vector<double>>(s.values);
    const std::size_t nx = s.positions_m[0].size(), ny = s.positions_m[1].size(),
                      nz = s.positions_m[2].size();
    REQUIRE(values.size() == nx * ny * nz);
    double largest = 0.0;
    if (s.name == "cut") {
      REQUIRE(ny == 1);
      CHECK(s.positions_m[1][0] == 8.25e-3);
      const bool e = s.component == Component::ey;
      CHECK(s.time_s == Approx((e ? 60.0 : 60.5) * p.lattice.dt_s));
      // Both sit half a cell up along y: between 7.5 and 8.5 mm.
      for (std::size_t x = 0; x < nx; ++x)
        for (std::size_t z = 0; z < nz; ++z) {
          const int i = static_cast<int>(std::lround(s.positions_m[0][x] * 1e3 - 0.0));
          const int k = static_cast<int>(std::lround(s.positions_m[2][z] * 1e3 - (e ? 0.0 : 0.5)));
          const double expected = (0.25 * f.row(s.component, i, 7)[k] + 0.75 * f.row(s.component, i, 8)[k]) /
                                  (e ? 1.0 : eta0_ohm);
          CHECK(values[x * nz + z] == Approx(expected).epsilon(1e-9).margin(1e-18));
          largest = std::max(largest, std::abs(expected));
        }
      CHECK(largest > 0.0);
      // The recorded plane covers the request.
      CHECK(s.positions_m[0].front() <= lo[0]);
      CHECK(s.positions_m[2].back() >= hi[2]);
    } else {
      CHECK(s.positions_m[0][1] - s.positions_m[0][0] == Approx(2e-3));
      for (std::size_t x = 0; x < nx; ++x)
        for (std::size_t y = 0; y < ny; ++y)
          for (std::size_t z = 0; z < nz; ++z) {
            const int i = static_cast<int>(std::lround(s.positions_m[0][x] * 1e3));
            const int j = static_cast<int>(std::lround(s.positions_m[1][y] * 1e3));
            const int k = static_cast<int>(std::lround(s.positions_m[2][z] * 1e3 - 0.5));
            CHECK(values[(x * ny + y) * nz + z] == f.row(Component::ez, i, j)[k]);
          }
    }
  }
}

TEST_CASE("Audit sums equal a direct Fourier sum of the fields", "[recorders][audit]") {
  Problem p = lit_box();
  p.recording.audit.frequencies_hz = {10e9, 17e9};
  p.recording.audit.faces = {true, false, false, true, true, false};
  p.recording.audit.sample_every = 2;
  Marcher<double> marcher(p, 2);
  Captures<double> captures(p.lattice);
  AuditRecorder<double> audit(p, captures);
  captures.freeze();
  marcher.attach(&captures);
  constexpr int steps = 75;  // not a whole number of blocks
  // One E and one H value of each face, summed by hand.
  struct Hand {
    Side side;
    Component c;
    Index3 at;
    std::array<Complex, 2> sum{};
  };
  // Plane 0 is two cells inside the shell's first node (5 or n - 5); half plane 0 is between planes 0 and 1.
  std::vector<Hand> hands{{Side::x_lo, Component::ey, {7, 9, 10}}, {Side::x_lo, Component::hz, {6, 9, 10}},
                          {Side::y_hi, Component::ez, {8, 11, 9}}, {Side::y_hi, Component::hx, {8, 11, 9}},
                          {Side::z_lo, Component::ex, {8, 9, 7}},  {Side::z_lo, Component::hy, {8, 9, 6}}};
  for (int n = 1; n <= steps; ++n) {
    marcher.advance(1, {&audit});
    if (n % 2 != 0) continue;
    for (Hand& hand : hands) {
      const bool e = is_electric(hand.c);
      const double t = (e ? n : n + 0.5) * p.lattice.dt_s;
      const double value =
          marcher.fields().row(hand.c, hand.at[0], hand.at[1])[hand.at[2]] / (e ? 1.0 : eta0_ohm);
      for (std::size_t f = 0; f < 2; ++f)
        hand.sum[f] += 2.0 * p.lattice.dt_s * value *
                       std::exp(Complex(0.0, -2.0 * pi * p.recording.audit.frequencies_hz[f] * t));
    }
  }
  const AuditRecord record = audit.finish();
  REQUIRE(record.faces.size() == 3);
  for (const Hand& hand : hands) {
    bool found = false;
    for (const AuditFace& face : record.faces) {
      if (face.side != hand.side) continue;
      CHECK(face.is_uniform);
      for (const AuditPlane& plane : face.planes) {
        const auto normal = static_cast<std::size_t>(index_of(axis_of(face.side)));
        if (plane.component != hand.c || plane.normal_index != hand.at[normal]) continue;
        found = true;
        int tangential[2], n = 0;
        for (std::size_t a = 0; a < 3; ++a)
          if (a != normal) tangential[n++] = hand.at[a];
        for (std::size_t f = 0; f < 2; ++f) {
          const auto at =
              (f * static_cast<std::size_t>(plane.shape[0]) + static_cast<std::size_t>(tangential[0])) *
                  static_cast<std::size_t>(plane.shape[1]) +
              static_cast<std::size_t>(tangential[1]);
          CAPTURE(name_of(face.side), name_of(hand.c), f);
          CHECK(std::abs(Complex(plane.sums[at]) - hand.sum[f]) < 1e-6 * std::abs(hand.sum[f]));
          CHECK(std::abs(hand.sum[f]) > 0.0);
        }
      }
    }
    CHECK(found);
  }
}

TEST_CASE("The audit knows uniform, layered and crossed faces", "[recorders][audit]") {
  Problem p = lit_box();
  p.media.push_back({"soil", 4.0, 1.0, 0.01, 0.0, false, false});
  p.objects.push_back({HalfSpace{Axis::z, 11e-3, true}, 1, "soil"});
  const auto look = [&](Side side) {
    const Painter painter(p.lattice, p.media, p.objects, 0);
    return audit_face(p, painter, side);
  };
  for (Side s : all_sides) {
    const AuditFace face = look(s);
    const bool side_face = axis_of(s) != Axis::z;
    CAPTURE(name_of(s));
    CHECK(face.is_uniform == !side_face);
    CHECK(face.is_layered);
    CHECK(face.planes.size() == 8);
    CHECK(face.permittivity_rel == (s == Side::z_lo ? 4.0 : s == Side::z_hi ? 1.0 : face.permittivity_rel));
    int ez = 0, hz = 0;
    for (const AuditPlane& plane : face.planes) {
      ez += plane.component == Component::ez;
      hz += plane.component == Component::hz;
    }
    CHECK(ez == (side_face ? 3 : 0));
    CHECK(hz == (side_face ? 3 : 0));
    CHECK(face.goes_on_to_wall);
    // The profile is that of the update: each node of Ex and Ey, each half node of Ez, shell included.
    CHECK(face.profile.empty() == !side_face);
    if (face.profile.empty()) continue;
    const auto cells = static_cast<std::size_t>(p.lattice.cells(Axis::z));
    REQUIRE(face.profile.permittivity_rel_node.size() == cells + 1);
    REQUIRE(face.profile.permittivity_rel_half.size() == cells);
    for (std::size_t k = 0; k < cells; ++k) {
      const double node_m = p.lattice.along(Axis::z).node_m(static_cast<int>(k));
      const double half_m = p.lattice.along(Axis::z).half_m(static_cast<int>(k));
      CAPTURE(k);
      CHECK(face.profile.permittivity_rel_half[k] == (half_m < 11e-3 ? 4.0 : 1.0));
      CHECK(face.profile.conductivity_s_per_m_half[k] == (half_m < 11e-3 ? 0.01 : 0.0));
      if (std::abs(node_m - 11e-3) > 1e-4)
        CHECK(face.profile.permittivity_rel_node[k] == (node_m < 11e-3 ? 4.0 : 1.0));
      else  // on the boundary, the mean of both
        CHECK(face.profile.permittivity_rel_node[k] == Approx(2.5));
    }
  }
  // An object inside the shell of x+ does not hinder the split; the expected reading must know.
  const double wall_m = p.lattice.along(Axis::x).node_m(p.lattice.cells(Axis::x));
  const double cell_x_m = p.lattice.along(Axis::x).cell_m(0);
  p.objects.push_back(
      {Box{{wall_m - 1.2 * cell_x_m, 8e-3, 8e-3}, {wall_m, 10e-3, 10e-3}, {0, 0, 1}, 0.0}, 0, "in"});
  CHECK(look(Side::x_hi).is_layered);
  CHECK_FALSE(look(Side::x_hi).goes_on_to_wall);
  p.objects.pop_back();
  p.objects.push_back({Box{{3e-3, 8e-3, 8e-3}, {9e-3, 10e-3, 10e-3}, {0, 0, 1}, 0.0}, 0, "void"});
  CHECK_FALSE(look(Side::x_lo).is_layered);
  CHECK_FALSE(look(Side::x_lo).is_uniform);
  CHECK(look(Side::x_hi).is_layered);
}

TEST_CASE("The audit samples as seldom as the pulse's spectrum allows", "[recorders][audit]") {
  Problem p = lit_box();
  p.recording.audit.frequencies_hz = {10e9, 20e9};
  const int q = audit_sample_every(p);
  const double end = spectrum_end_hz(p.dipoles[0].pulse, audit_alias_level);
  CHECK(1.0 / (q * p.lattice.dt_s) - 20e9 >= end);
  CHECK(1.0 / ((q + 1) * p.lattice.dt_s) - 20e9 < end);
  p.recording.audit.sample_every = 5;
  CHECK(audit_sample_every(p) == 5);
}

TEST_CASE("A face too shallow for the audit is refused", "[recorders][audit][errors]") {
  Problem p = vacuum_problem({10, 10, 3}, {1e-3, 1e-3, 1e-3});
  const Painter painter(p.lattice, p.media, p.objects, 0);
  CHECK_THROWS_WITH(audit_face(p, painter, Side::z_hi), Catch::Contains("at least 4 cells deep"));
}

TEST_CASE("The energy of a known field", "[recorders]") {
  Problem p = vacuum_problem({12, 12, 12}, {1e-3, 2e-3, 1.5e-3});
  p.media.push_back({"glass", 5.0, 1.0, 0.0, 0.0, false, false});
  p.objects.push_back({HalfSpace{Axis::x, 4e-3, true}, 1, "glass"});
  set_face(p, Side::x_lo, FaceKind::magnetic_wall);
  set_face(p, Side::x_hi, FaceKind::magnetic_wall);
  set_face(p, Side::y_lo, FaceKind::magnetic_wall);
  set_face(p, Side::y_hi, FaceKind::magnetic_wall);
  Marcher<double> marcher(p, 2);
  for (int i = 0; i <= 12; ++i)
    for (int j = 0; j <= 12; ++j)
      for (int k = 0; k < 12; ++k) marcher.fields().row(Component::ez, i, j)[k] = 3.0;
  const double area = 24e-3 * 18e-3;
  const double expected = 0.5 * eps0_f_per_m * 9.0 * area * (5.0 * 4e-3 + 8e-3);
  CHECK(marcher.clear_energy_j() == Approx(expected).epsilon(1e-12));
}

TEST_CASE("A run ends when its energy has fallen, and when its fields are no longer finite", "[run]") {
  Problem p = lit_box();
  p.stop.at_s = 4000 * p.lattice.dt_s;
  p.stop.energy_below_db = -50.0;
  p.recording.energy_every = 25;
  NoSink sink;
  NoMonitor monitor;
  const RunResult fell = run(p, sink, monitor);
  CHECK(fell.reason == StopReason::energy_fell);
  CHECK(fell.steps < 4000);
  CHECK(fell.energy.joule.back() <
        1e-5 * *std::max_element(fell.energy.joule.begin(), fell.energy.joule.end()));
  p.dipoles[0].moment = {1e308, 0.0, 0.0};
  const RunResult broken = run(p, sink, monitor);
  CHECK(broken.reason == StopReason::not_finite);
  CHECK_FALSE(broken.not_finite_where.empty());
  struct StopAtOnce : Monitor {
    bool go_on(const Progress& progress) override { return progress.step < 40; }
  } stop;
  p.dipoles[0].moment = {1e-3, 0.0, 0.0};
  const RunResult stopped = run(p, sink, stop);
  CHECK(stopped.reason == StopReason::interrupted);
  CHECK(stopped.steps >= 40);
  CHECK(stopped.steps < 200);
}
