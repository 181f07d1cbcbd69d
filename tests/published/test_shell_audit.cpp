// The shell audit from a run to its reading: against theory, against runs in which only one thing differs,
// and against its own floor.
#include <algorithm>
#include <catch2/catch.hpp>
#include <cmath>
#include <complex>

#include "postproc/audit_planes.hpp"
#include "postproc/audit_tables.hpp"
#include "postproc/reflection_table.hpp"
#include "tests/solver/setup.hpp"

using namespace wanewall;
using namespace wanewall::test;

namespace {

constexpr double cell_m = 1e-3;

LayerTable graded(double r0_db, int cells) {
  PolynomialGrading grading;
  grading.sigma_max_s_per_m =
      sigma_max_for_reflection(std::pow(10.0, r0_db / 20.0), grading.order, cells * cell_m);
  grading.alpha_max_s_per_m = 0.03;
  return polynomial_layer(grading, cells);
}

// Five cells in a deliberately scrambled order: the order must not matter.
MoebiusTable moebius_cells() {
  MoebiusTable table;
  for (double g : {3.1415, 0.9613, 10.6332, 1.5282, 6.4015}) {
    table.kappa.push_back(0.3);
    table.sigma_s_per_m.push_back(2.0 * c0_m_per_s * eps0_f_per_m * g / cell_m);
    table.alpha_s_per_m.push_back(0.03);
  }
  return table;
}

void set_moebius(Problem& problem, Side side) {
  set_face(problem, side, FaceKind::moebius);
  problem.faces[static_cast<std::size_t>(index_of(side))].moebius = moebius_cells();
  problem.lattice.shell_cells[static_cast<std::size_t>(index_of(side))] = moebius_cells().cells();
}

/// What a box is built with; its faces are read, two dipoles beside its middle light them.
struct Box14 {
  std::array<double, 6> r0_db{-60.0, -60.0, -60.0, -60.0, -60.0, -60.0};
  std::array<int, 6> cells{6, 6, 6, 6, 6, 6};
  std::array<bool, 6> moebius{};
  bool layered = false;
  bool defect = false;  ///< one cell of eps_r = 1.5 in the shell of x+, three cells deep
  long steps = 1400;
  Precision precision = Precision::double_precision;

  Problem problem() const {
    constexpr int clear = 14;
    const auto n = [&](Side s) {
      const auto i = static_cast<std::size_t>(index_of(s));
      return moebius[i] ? moebius_cells().cells() : cells[i];
    };
    Index3 whole{};
    Vec3 first{};
    for (Axis a : all_axes) {
      const auto i = static_cast<std::size_t>(index_of(a));
      whole[i] = clear + n(side_of(a, false)) + n(side_of(a, true));
      first[i] = -n(side_of(a, false)) * cell_m;
    }
    Problem p = vacuum_problem(whole, {cell_m, cell_m, cell_m});
    for (std::size_t i = 0; i < 3; ++i) p.lattice.lines[i] = MeshLines::uniform(first[i], cell_m, whole[i]);
    for (Side s : all_sides) {
      const auto i = static_cast<std::size_t>(index_of(s));
      if (moebius[i])
        set_moebius(p, s);
      else
        set_face(p, s, FaceKind::cfs_pml, graded(r0_db[i], cells[i]));
    }
    p.precision = precision;
    Pulse pulse;
    pulse.centre_hz = 20e9;
    pulse.width_s = 16e-12;
    pulse.delay_s = 7.0 * 16e-12;
    p.dipoles.push_back({false, {7.7e-3, 6.1e-3, 9.5e-3}, {0.5e-3, -0.3e-3, 1e-3}, pulse});
    p.dipoles.push_back({true, {5.9e-3, 8.2e-3, 8.5e-3}, {0.3, 0.2, -0.1}, pulse});
    if (layered) {
      p.media.push_back({"sand", 2.5, 1.0, 0.08, 0.0, false, false});
      p.media.push_back({"clay", 4.0, 1.0, 0.15, 0.0, false, false});
      p.objects.push_back({Box{{-1.0, -1.0, -1.0}, {1.0, 1.0, 5e-3}}, 1, "sand"});
      p.objects.push_back({Box{{-1.0, -1.0, -1.0}, {1.0, 1.0, 3e-3}}, 2, "clay"});
    }
    if (defect) {
      p.media.push_back({"defect", 1.5, 1.0, 0.0, 0.0, false, false});
      const double x = (clear + 2) * cell_m;
      p.objects.push_back(
          {Box{{x, 7e-3, 9e-3}, {x + cell_m, 8e-3, 10e-3}}, static_cast<int>(p.media.size()) - 1, "defect"});
    }
    p.recording.audit.frequencies_hz = {16e9, 24e9};
    p.recording.audit.faces.fill(true);
    p.stop.at_s = static_cast<double>(steps) * p.lattice.dt_s;
    return p;
  }
};

RunResult run_of(const Problem& problem) {
  NoSink sink;
  NoMonitor monitor;
  return run(problem, sink, monitor);
}

double energy_fall_db(const RunResult& result) {
  const std::vector<double>& joule = result.energy.joule;
  return 10.0 * std::log10(joule.back() / *std::max_element(joule.begin(), joule.end()));
}

const AuditFace& face_of(const RunResult& result, Side side) {
  return *std::find_if(result.audit.faces.begin(), result.audit.faces.end(),
                       [side](const AuditFace& f) { return f.side == side; });
}
const FaceReport& face_of(const AuditReport& report, Side side) {
  return *std::find_if(report.faces.begin(), report.faces.end(),
                       [side](const FaceReport& f) { return f.side == side; });
}

/// What two runs differ by on plane 0 of x+, relative to the second run's field there [dB]. The
/// cross-sections are the same; the second run's shell sends next to nothing back, so its field is what goes
/// out.
double difference_db(const Problem& a, const RunResult& run_a, const Problem& b, const RunResult& run_b,
                     std::size_t f) {
  const AuditFace &in_a = face_of(run_a, Side::x_hi), &in_b = face_of(run_b, Side::x_hi);
  const bool layered = !in_a.is_uniform;
  double difference = 0.0, size = 0.0;
  for (Component c : {layered ? Component::hz : Component::ey, Component::ez}) {
    const AuditPlane *at_a = find_plane(a.lattice, in_a, c, 0), *at_b = find_plane(b.lattice, in_b, c, 0);
    REQUIRE(at_a != nullptr);
    REQUIRE(at_b != nullptr);
    const auto value_a = sums_at(a.lattice, in_a, *at_a, f), value_b = sums_at(b.lattice, in_b, *at_b, f);
    const double weight = is_electric(c) ? 1.0 : eta0_ohm * eta0_ohm;
    difference += weight * (value_a - value_b).squaredNorm();
    size += weight * value_b.squaredNorm();
  }
  return 10.0 * std::log10(difference / size);
}

}  // namespace

TEST_CASE("Six different shells are read as their theory says, each with its floor", "[published][audit]") {
  Box14 box;
  box.r0_db = {-20.0, -40.0, -60.0, -30.0, -50.0, -60.0};
  box.layered = GENERATE(false, true);
  const bool with_moebius = GENERATE(false, true);
  if (with_moebius) box.moebius = {false, true, false, false, true, true};
  const Problem problem = box.problem();
  const RunResult result = run_of(problem);
  CAPTURE(box.layered, with_moebius, energy_fall_db(result));
  CHECK(energy_fall_db(result) < -80.0);
  const AuditReport report = audit_report(result.audit, problem.lattice, {});
  REQUIRE(report.faces.size() == 6);
  for (const FaceReport& face : report.faces) {
    CAPTURE(name_of(face.side), face.not_split_because, face.not_separable_because);
    CHECK(face.basis_is_modal);
    CHECK(face.is_layered == (box.layered && axis_of(face.side) != Axis::z));
    CHECK(face.goes_on_to_wall);
    for (const FaceReading& reading : face.readings) {
      REQUIRE(reading.whole);
      const WholeReading& whole = *reading.whole;
      CAPTURE(reading.frequency_hz, whole.reflection.value_db, whole.reflection.floor_db);
      REQUIRE(whole.expected_db);
      REQUIRE(whole.closure_db);
      CAPTURE(*whole.expected_db, *whole.closure_db);
      CHECK(whole.reflection.floor_db < floor_warning_db);
      CHECK(*whole.closure_db < whole.reflection.floor_db + closure_margin_db);
      if (whole.reflection.kind == Reflection::Kind::value)
        CHECK(whole.reflection.value_db == Approx(*whole.expected_db).margin(0.5));
      for (const AngleRow& row : reading.rows) {
        for (const AngleReading& r : row.readings) {
          if (r.reflection.kind != Reflection::Kind::value || r.not_illuminated) continue;
          CAPTURE(row.lo_deg);
          REQUIRE(r.expected_db);
          CHECK(r.reflection.value_db == Approx(*r.expected_db).margin(1.0));
        }
      }
    }
    const FaceVerdict verdict = verdict_of(face, -15.0);
    REQUIRE(verdict.as_designed);
    CHECK(*verdict.as_designed);
    CHECK(verdict.holds_goal == true);
  }
}

TEST_CASE("A poor face is read as a run with a much thicker one shows it", "[published][audit]") {
  Box14 box;
  box.layered = GENERATE(false, true);
  box.r0_db[1] = -30.0;
  box.steps = 800;
  const Problem poor = box.problem();
  Box14 thick = box;
  thick.cells[1] = 16;
  thick.r0_db[1] = -120.0;
  const Problem swapped = thick.problem();
  const RunResult run_poor = run_of(poor), run_swapped = run_of(swapped);
  const AuditReport report = audit_report(run_poor.audit, poor.lattice, {});
  for (std::size_t f : {0u, 1u}) {
    const WholeReading& whole = *face_of(report, Side::x_hi).readings[f].whole;
    const double by_swap_db = difference_db(poor, run_poor, swapped, run_swapped, f);
    CAPTURE(box.layered, f, by_swap_db, whole.reflection.value_db);
    CHECK(whole.reflection.value_db == Approx(by_swap_db).margin(1.0));
  }
}

TEST_CASE("One wrong cell in a layer is read as a run without it shows it", "[published][audit]") {
  Box14 box;
  box.layered = GENERATE(false, true);
  box.steps = 800;
  const Problem sound = box.problem();
  box.defect = true;
  const Problem defective = box.problem();
  const RunResult run_sound = run_of(sound), run_defective = run_of(defective);
  const AuditReport report = audit_report(run_defective.audit, defective.lattice, {});
  const FaceReport& face = face_of(report, Side::x_hi);
  CHECK_FALSE(face.goes_on_to_wall);
  for (std::size_t f : {0u, 1u}) {
    const WholeReading& whole = *face.readings[f].whole;
    const double by_runs_db = difference_db(defective, run_defective, sound, run_sound, f);
    CAPTURE(box.layered, f, by_runs_db, *whole.closure_db, whole.reflection.floor_db);
    CHECK(*whole.closure_db == Approx(by_runs_db).margin(1.0));
    CHECK(whole.reflection.floor_db < *whole.closure_db - 20.0);
  }
  CHECK(verdict_of(face, {}).as_designed == false);
  CHECK_THAT(verdict_text(face, {}), Catch::Contains("NOT as designed"));
  // The defect is seen on its own face only.
  for (const FaceReport& other : report.faces) {
    CAPTURE(name_of(other.side));
    if (other.side != Side::x_hi) CHECK(verdict_of(other, {}).as_designed == true);
  }
}

TEST_CASE("The floor rises with the error when the record is cut short", "[published][audit]") {
  Box14 box;
  double before_db = -300.0;
  for (long steps : {1400L, 500L, 320L}) {
    box.steps = steps;
    const Problem problem = box.problem();
    const RunResult result = run_of(problem);
    const AuditReport report = audit_report(result.audit, problem.lattice, {});
    double highest_floor_db = -300.0;
    for (const FaceReport& face : report.faces) {
      for (const FaceReading& reading : face.readings) {
        const WholeReading& whole = *reading.whole;
        CAPTURE(steps, name_of(face.side), reading.frequency_hz, *whole.closure_db);
        // The method's trial found it 0.5 dB below the true error at worst; this many faces find a little
        // more.
        CHECK(whole.reflection.floor_db > *whole.closure_db - 3.0);
        highest_floor_db = std::max(highest_floor_db, whole.reflection.floor_db);
      }
      const std::string table = to_markdown(power_table(face));
      if (steps == 320) CHECK_THAT(table, Catch::Contains("record too short"));
      if (steps == 1400) CHECK_THAT(table, !Catch::Contains("record too short"));
    }
    CHECK(highest_floor_db > before_db);
    before_db = highest_floor_db;
  }
}

TEST_CASE("The floor tells when the side shells are not what the record says", "[published][audit]") {
  const Problem problem = Box14{}.problem();
  const RunResult result = run_of(problem);
  AuditRecord wrong = result.audit;
  for (Face& face : wrong.shell)
    for (double& sigma : face.layer.sigma_e_s_per_m) sigma *= 1.001;
  const AuditReport right = audit_report(result.audit, problem.lattice, {});
  const AuditReport off = audit_report(wrong, problem.lattice, {});
  for (std::size_t n = 0; n < 6; ++n) {
    const double floor_db = off.faces[n].readings[0].whole->reflection.floor_db;
    CAPTURE(n, floor_db);
    CHECK(floor_db > floor_warning_db);
    CHECK(floor_db > right.faces[n].readings[0].whole->reflection.floor_db + 20.0);
  }
}

TEST_CASE("Where a side shell has no modes the face falls back to tapers and says so", "[published][audit]") {
  Box14 box;
  box.steps = 200;
  Problem problem = box.problem();
  set_face(problem, Side::y_lo, FaceKind::matched_slab, graded(-40.0, 6));
  const AuditReport report = audit_report(run_of(problem).audit, problem.lattice, {});
  for (const FaceReport& face : report.faces) {
    const bool beside = axis_of(face.side) != Axis::y;
    CAPTURE(name_of(face.side));
    CHECK(face.not_split_because.empty());
    CHECK(face.basis_is_modal == !beside);
    CHECK(face.not_separable_because.empty() == !beside);
    if (beside) CHECK_THAT(face.not_separable_because, Catch::Contains("matched_slab face y-"));
  }
}

TEST_CASE("Energy out and energy back differ by what passes through the plane", "[published][audit]") {
  // Joined sides: the waves are orthogonal. Only one of them travels, and the dipole is so far away that the
  // others have died out: evanescent waves that go and come carry power together.
  Problem p = vacuum_problem({8, 7, 60}, {cell_m, cell_m, cell_m});
  set_periodic(p, Axis::x);
  set_periodic(p, Axis::y);
  set_face(p, Side::z_lo, FaceKind::cfs_pml, graded(-60.0, 8));
  set_face(p, Side::z_hi, FaceKind::cfs_pml, graded(-20.0, 8));
  Pulse pulse;
  pulse.centre_hz = 24e9;
  pulse.width_s = 100e-12;  // nothing at the next wave's cut-off, which would ring
  pulse.delay_s = 7.0 * 100e-12;
  p.dipoles.push_back({false, {5.3e-3, 4.1e-3, 14.2e-3}, {1e-3, 0.4e-3, 0.7e-3}, pulse});
  p.recording.audit.frequencies_hz = {22e9, 26e9};
  p.recording.audit.faces = {false, false, false, false, false, true};
  p.stop.at_s = 4000 * p.lattice.dt_s;
  const AuditReport report = audit_report(run_of(p).audit, p.lattice, {});
  for (const FaceReading& reading : report.faces.at(0).readings) {
    const double floor = std::pow(10.0, reading.total.reflection.floor_db / 20.0);
    const double out = reading.total.outgoing_w_s2, back = reading.total.returned_w_s2;
    const double open = std::abs(out - back - reading.net->clear_w_s2) / out;
    CAPTURE(reading.frequency_hz, reading.total.reflection.value_db, reading.total.reflection.floor_db, open);
    CHECK(reading.total.reflection.value_db > -30.0);
    CHECK(open < 4.0 * floor + 1e-10);
  }
}
