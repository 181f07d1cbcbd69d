// What is written into a record comes back from it.
#include <catch2/catch.hpp>

#include "io/errors.hpp"
#include "io/record.hpp"
#include "record_fixture.hpp"

using namespace wanewall;
using namespace wanewall::test;

TEST_CASE("A record gives back the scene, the mesh and the provenance", "[record]") {
  const TemporaryFolder folder;
  write_small_record(folder / "run.h5");
  CHECK(folder.n_files() == 1);
  const Record record(folder / "run.h5");
  const Scene scene = small_scene();

  CHECK(record.title == scene.title);
  CHECK(record.scene_text == scene.text);
  CHECK(record.band_lo_hz == scene.band_lo_hz);
  CHECK(record.band_hi_hz == scene.band_hi_hz);
  REQUIRE(record.used.size() == scene.used.size());
  for (std::size_t n = 0; n < scene.used.size(); ++n) {
    CHECK(record.used[n].path == scene.used[n].path);
    CHECK(record.used[n].value == scene.used[n].value);
    CHECK(record.used[n].by_default == scene.used[n].by_default);
  }
  for (const Axis axis : all_axes)
    CHECK(record.lattice.along(axis).all_m() == scene.problem.lattice.along(axis).all_m());
  CHECK(record.lattice.shell_cells == scene.problem.lattice.shell_cells);
  CHECK(record.lattice.periodic == scene.problem.lattice.periodic);
  CHECK(record.lattice.dt_s == scene.problem.lattice.dt_s);
  CHECK(record.precision == scene.problem.precision);
  for (const Side side : all_sides)
    CHECK(record.result.audit.shell[static_cast<std::size_t>(index_of(side))].kind ==
          scene.problem.face(side).kind);

  const Provenance p = small_provenance();
  CHECK(record.provenance.program_version == p.program_version);
  CHECK(record.provenance.build_type == p.build_type);
  CHECK(record.provenance.compiler == p.compiler);
  CHECK(record.provenance.processor == p.processor);
  CHECK(record.provenance.host_system == p.host_system);
  CHECK(record.provenance.started_utc == p.started_utc);
  CHECK(record.provenance.ended_utc == p.ended_utc);
  CHECK(record.provenance.threads == p.threads);
  CHECK(record.provenance.vector_code == p.vector_code);
  CHECK(record.provenance.schedule == p.schedule);
}

TEST_CASE("A record says how long its run waited for the disk, when it had snapshots to write", "[record]") {
  const TemporaryFolder folder;
  Provenance provenance = small_provenance();
  for (const std::optional<double> wait_s : {std::optional<double>{}, std::optional<double>{0.375}}) {
    provenance.disk_wait_s = wait_s;
    {
      RecordWriter writer(folder / "run.h5", small_scene());
      writer.finish(small_result(), provenance, false);
    }
    CHECK(Record(folder / "run.h5").provenance.disk_wait_s == wait_s);
  }
}

TEST_CASE("A record says exactly what shell ran and what the audit's split needs of the media", "[record]") {
  const TemporaryFolder folder;
  Scene scene = small_scene();
  const auto face_at = [&](Side side) -> Face& {
    return scene.problem.faces[static_cast<std::size_t>(index_of(side))];
  };
  face_at(Side::x_lo).layer = polynomial_layer({3.0, 0.7, 2.5, 1.0 / 3.0, 1.0}, 2);
  face_at(Side::x_hi).layer = polynomial_layer({2.0, 0.1, 1.0, 0.0, 1.0}, 2);
  face_at(Side::z_lo).kind = FaceKind::moebius;
  face_at(Side::z_lo).moebius = {{0.25, 1.0 / 3.0, 2.0}, {0.5, 1e-17, 7.0}, {1e-3, 0.0, 0.1}};
  face_at(Side::z_hi).kind = FaceKind::one_way;
  face_at(Side::z_hi).one_way_order = 2;
  RunResult result = small_result();
  AuditFace& z = result.audit.faces.at(0);
  z.goes_on_to_wall = false;
  z.magnetic_conductivity_ohm_per_m = 12.5;
  AuditFace& x = result.audit.faces.at(1);
  x.clear_is_uniform = false;
  x.profile = {{1.0, 2.0, 1.0 / 3.0}, {0.0, 0.1, 0.2}, {4.0, 5.0},       {0.3, 0.4},
               {1.1, 1.2, 1.3},       {6.0, 7.0, 8.0}, {1.4, 1.0 / 7.0}, {9.0, 10.0}};
  {
    RecordWriter writer(folder / "run.h5", scene);
    writer.finish(result, small_provenance(), false);
  }
  const AuditRecord back = Record(folder / "run.h5").result.audit;
  for (Side side : all_sides) {
    const Face& face = back.shell[static_cast<std::size_t>(index_of(side))];
    CAPTURE(name_of(side));
    CHECK(face.kind == face_at(side).kind);
    CHECK(face.one_way_order == face_at(side).one_way_order);
    CHECK(face.layer.sigma_e_s_per_m == face_at(side).layer.sigma_e_s_per_m);
    CHECK(face.layer.sigma_h_s_per_m == face_at(side).layer.sigma_h_s_per_m);
    CHECK(face.layer.kappa_e == face_at(side).layer.kappa_e);
    CHECK(face.layer.kappa_h == face_at(side).layer.kappa_h);
    CHECK(face.layer.alpha_e_s_per_m == face_at(side).layer.alpha_e_s_per_m);
    CHECK(face.layer.alpha_h_s_per_m == face_at(side).layer.alpha_h_s_per_m);
    CHECK(face.moebius.kappa == face_at(side).moebius.kappa);
    CHECK(face.moebius.sigma_s_per_m == face_at(side).moebius.sigma_s_per_m);
    CHECK(face.moebius.alpha_s_per_m == face_at(side).moebius.alpha_s_per_m);
  }
  CHECK_FALSE(back.faces.at(0).goes_on_to_wall);
  CHECK(back.faces.at(0).clear_is_uniform);
  CHECK(back.faces.at(0).magnetic_conductivity_ohm_per_m == 12.5);
  CHECK(back.faces.at(0).profile.empty());
  CHECK(back.faces.at(1).goes_on_to_wall);
  CHECK_FALSE(back.faces.at(1).clear_is_uniform);
  const LayeredProfile &p = back.faces.at(1).profile, &q = x.profile;
  CHECK(p.permittivity_rel_node == q.permittivity_rel_node);
  CHECK(p.conductivity_s_per_m_node == q.conductivity_s_per_m_node);
  CHECK(p.permittivity_rel_half == q.permittivity_rel_half);
  CHECK(p.conductivity_s_per_m_half == q.conductivity_s_per_m_half);
  CHECK(p.permeability_rel_node == q.permeability_rel_node);
  CHECK(p.magnetic_conductivity_ohm_per_m_node == q.magnetic_conductivity_ohm_per_m_node);
  CHECK(p.permeability_rel_half == q.permeability_rel_half);
  CHECK(p.magnetic_conductivity_ohm_per_m_half == q.magnetic_conductivity_ohm_per_m_half);
}

TEST_CASE("A record gives back all of a run's result", "[record]") {
  const TemporaryFolder folder;
  RunResult result = small_result();
  result.reason = GENERATE(StopReason::reached_end, StopReason::energy_fell, StopReason::interrupted,
                           StopReason::not_finite);
  result.not_finite_where = "Ez at (3, 4, 5)";
  {
    RecordWriter writer(folder / "run.h5", small_scene());
    writer.finish(result, small_provenance(), false);
  }
  const RunResult back = Record(folder / "run.h5").result;

  CHECK(back.steps == result.steps);
  CHECK(back.reason == result.reason);
  CHECK(back.not_finite_where == result.not_finite_where);
  CHECK(back.threads == result.threads);
  CHECK(back.vector_code == result.vector_code);
  CHECK(back.build_seconds == result.build_seconds);
  CHECK(back.march_seconds == result.march_seconds);
  CHECK(back.energy.step == result.energy.step);
  CHECK(back.energy.joule == result.energy.joule);
  REQUIRE(back.points.size() == result.points.size());
  for (std::size_t n = 0; n < back.points.size(); ++n) {
    CHECK(back.points[n].name == result.points[n].name);  // in the same order
    CHECK(back.points[n].position_m == result.points[n].position_m);
    CHECK(back.points[n].values == result.points[n].values);
  }
  CHECK(back.audit.frequencies_hz == result.audit.frequencies_hz);
  CHECK(back.audit.sample_every == result.audit.sample_every);
  CHECK(back.audit.incident_v_s_per_m == result.audit.incident_v_s_per_m);
  CHECK(back.audit.incident_direction == result.audit.incident_direction);
  CHECK(back.audit.incident_impedance_ohm == result.audit.incident_impedance_ohm);
  REQUIRE(back.audit.faces.size() == result.audit.faces.size());
  for (std::size_t f = 0; f < back.audit.faces.size(); ++f) {
    const AuditFace &face = back.audit.faces[f], &wanted = result.audit.faces[f];
    CHECK(face.side == wanted.side);
    CHECK(face.is_uniform == wanted.is_uniform);
    CHECK(face.is_layered == wanted.is_layered);
    CHECK(face.permittivity_rel == wanted.permittivity_rel);
    CHECK(face.permeability_rel == wanted.permeability_rel);
    CHECK(face.conductivity_s_per_m == wanted.conductivity_s_per_m);
    REQUIRE(face.planes.size() == wanted.planes.size());
    for (std::size_t p = 0; p < face.planes.size(); ++p) {
      CHECK(face.planes[p].component == wanted.planes[p].component);
      CHECK(face.planes[p].normal_index == wanted.planes[p].normal_index);
      CHECK(face.planes[p].normal_m == wanted.planes[p].normal_m);
      CHECK(face.planes[p].shape == wanted.planes[p].shape);
      CHECK(face.planes[p].sums == wanted.planes[p].sums);
    }
  }
}

TEST_CASE("A run that recorded nothing makes a record too", "[record]") {
  const TemporaryFolder folder;
  Scene scene = small_scene();
  scene.title.clear();
  scene.used.clear();
  {
    RecordWriter writer(folder / "run.h5", scene);
    writer.finish(RunResult{}, Provenance{}, true);
  }
  const Record record(folder / "run.h5");
  CHECK(record.title.empty());
  CHECK(record.used.empty());
  CHECK(record.snapshots.empty());
  CHECK(record.result.points.empty());
  CHECK(record.result.energy.step.empty());
  CHECK(record.result.audit.faces.empty());
  CHECK(record.result.audit.incident_v_s_per_m.empty());
}

TEST_CASE("The audit's planes can be left on the disk", "[record]") {
  const TemporaryFolder folder;
  write_small_record(folder / "run.h5");
  const Record record(folder / "run.h5", AuditPlanes::leave);
  REQUIRE(record.result.audit.faces.size() == 2);
  REQUIRE(record.result.audit.faces[0].planes.size() == 3);
  CHECK(record.result.audit.faces[0].planes[0].shape == std::array<int, 2>{4, 3});
  CHECK(record.result.audit.faces[0].planes[0].sums.empty());
}

TEST_CASE("Snapshots come back in their own precision and order", "[record]") {
  const TemporaryFolder folder;
  write_small_record(folder / "run.h5");
  const Record record(folder / "run.h5");
  const Lattice lattice = small_lattice();
  REQUIRE(record.snapshots.size() == 8);
  std::size_t planes = 0;
  for (const SnapshotList& list : record.snapshots) {
    CAPTURE(list.name, name_of(list.component));
    REQUIRE(list.steps == std::vector<long>{20, 40});
    const bool is_plane = list.name == "plane y";
    planes += is_plane ? 1 : 0;
    auto points_m = lattice_points(lattice, list.component, is_plane ? 1 : 2);
    if (is_plane) points_m[1] = {0.13};
    CHECK(list.positions_m == points_m);
    for (std::size_t which = 0; which < 2; ++which) {
      const Snapshot wanted =
          counted_snapshot(list.name, list.steps[which], list.component, points_m, lattice.dt_s);
      const Snapshot back = record.load(list, which);
      CHECK(back.name == wanted.name);
      CHECK(back.step == wanted.step);
      CHECK(back.time_s == wanted.time_s);
      CHECK(list.times_s[which] == wanted.time_s);
      CHECK(back.component == wanted.component);
      CHECK(back.positions_m == wanted.positions_m);
      const auto& values = std::get<std::vector<double>>(wanted.values);
      if (is_plane)
        CHECK(std::get<std::vector<float>>(back.values) == std::vector<float>(values.begin(), values.end()));
      else
        CHECK(std::get<std::vector<double>>(back.values) == values);
    }
  }
  CHECK(planes == 2);
}

TEST_CASE("A part of a snapshot is the same as that part of the whole", "[record]") {
  const TemporaryFolder folder;
  write_small_record(folder / "run.h5");
  const Record record(folder / "run.h5");
  for (const SnapshotList& list : record.snapshots) {
    if (list.name != "volume") continue;
    const Index3 begin{1, 2, 0}, end{3, 4, 3};
    const std::vector<double> part = record.load_part(list, 1, begin, end);
    REQUIRE(part.size() == 2 * 2 * 3);
    std::size_t at = 0;
    for (int i = begin[0]; i < end[0]; ++i)
      for (int j = begin[1]; j < end[1]; ++j)
        for (int k = begin[2]; k < end[2]; ++k) CHECK(part[at++] == 100 * i + 10 * j + k + 0.04);
    CHECK_THROWS_AS(record.load_part(list, 1, {0, 0, 0}, {1, 1, 1000}), FileError);
  }
}

TEST_CASE("Snapshot and point names that become the same in the file are refused", "[record]") {
  const TemporaryFolder folder;
  Scene scene = small_scene();
  scene.problem.recording.snapshots.resize(2);
  scene.problem.recording.snapshots[0].name = "cut a";
  scene.problem.recording.snapshots[1].name = "cut_a";
  CHECK_THROWS_WITH(RecordWriter(folder / "run.h5", scene), Catch::Contains("\"cut a\"") &&
                                                                Catch::Contains("\"cut_a\"") &&
                                                                Catch::Contains("rename one"));
  scene = small_scene();
  scene.problem.recording.points = {{"p.1", {}}, {"p-1", {}}};
  CHECK_THROWS_AS(RecordWriter(folder / "run.h5", scene), FileError);
  CHECK(folder.n_files() == 0);
}

TEST_CASE("A writer that does not finish leaves nothing and spares the older record", "[record]") {
  const TemporaryFolder folder;
  write_small_record(folder / "run.h5");
  {
    RecordWriter writer(folder / "run.h5", small_scene());
    const auto points_m = lattice_points(small_lattice(), Component::ex, 1);
    writer.take(counted_snapshot("cut", 3, Component::ex, points_m, 1e-12));
    CHECK(folder.n_files() == 2);
  }
  CHECK(folder.n_files() == 1);
  CHECK(Record(folder / "run.h5").snapshots.size() == 8);
}
