#include "postproc/reflection_table.hpp"

#include <omp.h>

#include <catch2/catch.hpp>
#include <cmath>
#include <stdexcept>

#include "postproc/audit_tables.hpp"
#include "tests/postproc/lattice_fields.hpp"

using namespace wanewall;
using namespace wanewall::test;

namespace {

using Kind = Reflection::Kind;

AuditRecord record_of(const TestFace& face, const WaveSum& waves) {
  AuditRecord audit;
  audit.frequencies_hz = {face.frequency_hz};
  audit.faces = {audit_face(face, waves)};
  return audit;
}

TestFace tile(int cells) {
  TestFace face;
  face.periodic = {true, true};
  face.clear_cells = {cells, cells + 1};
  return face;
}

}  // namespace

TEST_CASE("A reading is a value, a bound or nothing, by its floor", "[reflection_table]") {
  // Field level: r = 0.1 against f = 0.05, 0.06, 0.95.
  const Reflection value = reflection_of(1.0, 0.01, 0.0025 * (1.0 - 1e-12));
  CHECK(value.kind == Kind::value);
  CHECK(value.value_db == Approx(-20.0));
  CHECK(value.low_db == Approx(20.0 * std::log10(0.05)).epsilon(1e-6));
  CHECK(value.high_db == Approx(20.0 * std::log10(0.15)));
  CHECK(value.floor_db == Approx(-26.0206));
  CHECK(reflection_text(value) == "-20.0");

  const Reflection bound = reflection_of(1.0, 0.01, 0.0036);
  CHECK(bound.kind == Kind::bound);
  CHECK(bound.high_db == Approx(20.0 * std::log10(0.16)));
  CHECK(std::isinf(bound.low_db));
  CHECK(reflection_text(bound) == "< -15.9 (floor)");

  CHECK(reflection_of(1.0, 0.01, 0.9025).kind == Kind::no_reading);
  CHECK(reflection_of(0.0, 0.0, 0.0).kind == Kind::no_reading);
  CHECK(reflection_text(reflection_of(0.0, 0.0, 0.0)) == "no reading");
  CHECK(reflection_of(std::nan(""), 1.0, 1.0).kind == Kind::no_reading);
}

TEST_CASE("The report reads a known reflection on a periodic face", "[reflection_table]") {
  const TestFace face = tile(30);
  WaveSum wave = one_wave(face, 0.0, 0.0, 0.0, 1.0);
  wave.tm_in(0, 0) = 0.01;
  const AuditReport report = audit_report(record_of(face, wave), face.lattice(), {});
  REQUIRE(report.faces.size() == 1);
  const FaceReport& z = report.faces[0];
  CHECK(z.side == Side::z_hi);
  CHECK(z.basis_is_exact);
  CHECK(z.shell_cells == 3);
  REQUIRE(z.readings.size() == 1);
  const FaceReading& reading = z.readings[0];
  CHECK(reading.total.reflection.kind == Kind::value);
  CHECK(reading.total.reflection.value_db == Approx(-40.0).margin(0.01));  // sums in single precision
  CHECK(reading.total.reflection.floor_db < -90.0);
  CHECK(reading.near_normal.reflection.value_db == Approx(reading.total.reflection.value_db));
  REQUIRE(reading.net);
  CHECK(reading.net->clear_w_s2 ==
        Approx(reading.total.outgoing_w_s2 - reading.total.returned_w_s2).epsilon(1e-5));
  REQUIRE(reading.rows.size() == 9);
  const AngleReading &te = reading.rows[0].readings[0], &tm = reading.rows[0].readings[1];
  CHECK(tm.share_db == Approx(0.0).margin(1e-6));
  CHECK_FALSE(tm.not_illuminated);
  CHECK(te.not_illuminated);
  for (const AngleRow& row : reading.rows) CHECK_FALSE(row.walk_off);  // a periodic face has no sides
  CHECK(worst_reading(z, AngleRange::all) == &reading);
}

TEST_CASE("Bins, shares and flags of a tapered face", "[reflection_table]") {
  TestFace face;
  face.clear_cells = {90, 75};
  face.side = Side::y_lo;
  face.shell_cells = 12;
  const double theta = 33.0 * pi / 180.0;
  const AuditReport report =
      audit_report(record_of(face, one_wave(face, theta, 0.4, 1.0, 0.0)), face.lattice(), {});
  const FaceReading& reading = report.faces.at(0).readings.at(0);
  REQUIRE(reading.rows.size() == 9);
  CHECK(reading.rows[3].lo_deg == 30.0);
  CHECK(reading.rows[3].hi_deg == 40.0);
  for (std::size_t bin = 0; bin < 9; ++bin) {
    CAPTURE(bin);
    const AngleReading& te = reading.rows[bin].readings[0];
    CHECK(te.share_db <= reading.rows[3].readings[0].share_db);
    CHECK(te.not_illuminated == (te.share_db < -20.0));
    if (bin > 6) CHECK(te.not_illuminated);
    // From plane 0 to the wall: 2 cells and a shell of 12; L/2 = 45 cells of 10 mm and 37.5 cells of 12 mm.
    const double back_m =
        2.0 * 14.0 * face.spacing_m[2] * std::tan((10.0 * static_cast<double>(bin) + 5.0) * pi / 180.0);
    CHECK(reading.rows[bin].walk_off == (back_m > 0.45));
  }
  CHECK_FALSE(reading.rows[5].walk_off);
  CHECK(reading.rows[6].walk_off);
  CHECK(reading.near_normal.share_db < 0.0);
  double sum = 0.0;
  for (const AngleRow& row : reading.rows)
    for (const AngleReading& r : row.readings) sum += r.outgoing_w_s2;
  CHECK(sum == Approx(reading.total.outgoing_w_s2).epsilon(1e-12));
}

TEST_CASE("Faces and frequencies can be chosen, and bins made finer", "[reflection_table]") {
  TestFace face = tile(24);
  AuditRecord audit = record_of(face, one_wave(face, 0.0, 0.0, 1.0, 0.0));
  face.side = Side::x_lo;
  TestFace x = face;
  AuditFace other = audit_face(x, one_wave(x, 0.0, 0.0, 1.0, 0.0));
  // Three frequencies with the same sums.
  audit.frequencies_hz = {1.9e9, 2.0e9, 2.1e9};
  for (AuditPlane& plane : audit.faces[0].planes) {
    const auto once = plane.sums;
    plane.sums.insert(plane.sums.end(), once.begin(), once.end());
    plane.sums.insert(plane.sums.end(), once.begin(), once.end());
  }
  ReportChoice choice;
  choice.frequencies = {2, 0};
  choice.angle_bins = 18;
  const AuditReport report = audit_report(audit, tile(24).lattice(), choice);
  REQUIRE(report.faces.at(0).readings.size() == 2);
  CHECK(report.faces[0].readings[0].frequency_hz == 2.1e9);
  CHECK(report.faces[0].readings[1].frequency_hz == 1.9e9);
  CHECK(report.faces[0].readings[0].rows.size() == 18);
  choice.faces = {Side::x_hi};
  CHECK(audit_report(audit, tile(24).lattice(), choice).faces.empty());
}

TEST_CASE("The report does not depend on the number of threads", "[reflection_table]") {
  TestFace face;
  face.clear_cells = {30, 24};
  AuditRecord audit = record_of(face, waves_of(face, {TestSource::Kind::beam, 1.0, 0.0, 0.1, 20.0}));
  audit.frequencies_hz = {1.8e9, 2.0e9, 2.2e9};
  for (AuditPlane& plane : audit.faces[0].planes) {
    const auto once = plane.sums;
    for (int copies = 0; copies < 2; ++copies) plane.sums.insert(plane.sums.end(), once.begin(), once.end());
  }
  const int before = omp_get_max_threads();
  std::vector<std::string> texts;
  for (int threads : {1, 2, 3}) {
    omp_set_num_threads(threads);
    texts.push_back(to_csv(reflection_rows(audit_report(audit, face.lattice(), {}))));
  }
  omp_set_num_threads(before);
  CHECK(texts[0].size() > 1000);
  CHECK(texts[1] == texts[0]);
  CHECK(texts[2] == texts[0]);
}

TEST_CASE("Faces that are not uniform give net power only, and say why", "[reflection_table]") {
  const TestFace face = tile(16);
  AuditRecord audit = record_of(face, one_wave(face, 0.0, 0.0, 1.0, 0.0));
  audit.faces[0].is_uniform = false;
  audit.faces[0].is_layered = true;
  const AuditReport report = audit_report(audit, face.lattice(), {});
  const FaceReport& z = report.faces[0];
  CHECK_THAT(z.not_split_because,
             Catch::Contains("crosses layers") && Catch::Contains("what ends the lattice"));
  REQUIRE(z.readings[0].net);
  CHECK(z.readings[0].net->clear_w_s2 > 0.0);
  CHECK(z.readings[0].rows.empty());
  CHECK(worst_reading(z, AngleRange::all) == nullptr);
  CHECK(power_table(z).columns.size() == 2);
  CHECK(reflection_rows(report).rows.empty());
  REQUIRE(power_rows(report).rows.size() == 1);
  CHECK(power_rows(report).rows[0].size() == power_rows(report).columns.size());
  CHECK_THAT(to_markdown(overview_table(report)),
             Catch::Contains("net power only: the face's plane crosses layers"));
}

TEST_CASE("Power relative to the incident wave stands where it means something", "[reflection_table]") {
  const TestFace face = tile(16);
  AuditRecord audit = record_of(face, one_wave(face, 0.0, 0.0, 0.0, 0.5));
  audit.incident_v_s_per_m = {1.0};
  audit.incident_impedance_ohm = eta0_ohm;
  audit.incident_direction = {0.0, 0.0, -1.0};
  // Half the field comes back out through z+: -6.02 dB.
  const std::string text = to_markdown(power_table(audit_report(audit, face.lattice(), {}).faces[0]));
  CHECK_THAT(text, Catch::Contains("net / incident [dB]") && Catch::Contains("-6.0"));
  audit.incident_direction = {1.0, 0.0, 0.0};
  CHECK_THAT(to_markdown(power_table(audit_report(audit, face.lattice(), {}).faces[0])),
             !Catch::Contains("incident"));
}

TEST_CASE("Records that do not fit together are refused, not read", "[reflection_table]") {
  const TestFace face = tile(16);
  AuditRecord audit = record_of(face, one_wave(face, 0.0, 0.0, 1.0, 0.0));
  Lattice lattice = face.lattice();
  SECTION("another lattice") {
    lattice.lines[0] = MeshLines::uniform(0.0, 0.01, 17);
  }
  SECTION("a missing plane") {
    audit.faces[0].planes.erase(audit.faces[0].planes.begin());
  }
  SECTION("a plane of another shape") {
    std::swap(audit.faces[0].planes[0].shape[0], audit.faces[0].planes[0].shape[1]);
  }
  SECTION("no planes at all") {
    audit.faces[0].planes.clear();
  }
  SECTION("fewer sums than frequencies") {
    audit.frequencies_hz.push_back(3e9);
  }
  SECTION("planes outside the lattice") {
    for (AuditPlane& plane : audit.faces[0].planes) plane.normal_index += 10;
  }
  SECTION("a frequency beyond the time step") {
    audit.frequencies_hz[0] = 1e12;
  }
  SECTION("shells that overlap") {
    lattice.shell_cells = {0, 0, 0, 0, 9, 9};
  }
  CHECK_THROWS_AS(audit_report(audit, lattice, {}), std::invalid_argument);
}

TEST_CASE("Every row of the tables has a cell for every column", "[reflection_table]") {
  TestFace face;
  face.clear_cells = {30, 24};
  AuditRecord audit = record_of(face, one_wave(face, 0.3, 0.2, 1.0, 1.0));
  audit.incident_v_s_per_m = {1.0};
  audit.incident_impedance_ohm = eta0_ohm;
  audit.incident_direction = {0.0, 0.6, 0.8};
  const AuditReport report = audit_report(audit, face.lattice(), {});
  const Table tables[] = {overview_table(report), power_table(report.faces[0]),
                          angle_table(report.faces[0].readings[0]), power_rows(report),
                          reflection_rows(report)};
  for (const Table& table : tables) {
    CHECK_FALSE(table.rows.empty());
    for (const auto& row : table.rows) CHECK(row.size() == table.columns.size());
  }
  CHECK(reflection_rows(report).rows.size() == 18);
  CHECK(has_angles(report.faces[0]));
}

TEST_CASE("Tables leave out empty bins and say where nothing was lit", "[reflection_table]") {
  const TestFace small = tile(6);
  const AuditReport one_mode =
      audit_report(record_of(small, one_wave(small, 0.0, 0.0, 1.0, 1.0)), small.lattice(), {});
  CHECK(angle_table(one_mode.faces[0].readings[0]).rows.size() == 2);  // TE and TM
  CHECK(reflection_rows(one_mode).rows.size() == 2);
  CHECK_FALSE(has_angles(one_mode.faces[0]));

  TestFace face;
  face.clear_cells = {90, 75};
  const AuditReport oblique =
      audit_report(record_of(face, one_wave(face, 65.0 * pi / 180.0, 0.4, 1.0, 1.0)), face.lattice(), {});
  CHECK(oblique.faces[0].readings[0].near_normal.not_illuminated);
  CHECK_THAT(to_markdown(power_table(oblique.faces[0])), Catch::Contains("not illuminated"));
  CHECK(worst_reading(oblique.faces[0], AngleRange::near_normal) == nullptr);
  CHECK(worst_reading(oblique.faces[0], AngleRange::all) != nullptr);
}
