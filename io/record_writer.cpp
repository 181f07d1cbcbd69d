#include <fmt/format.h>

#include <stdexcept>

#include "io/atomic_file.hpp"
#include "io/hdf5.hpp"
#include "io/record.hpp"
#include "io/record_layout.hpp"
#include "io/record_mesh.hpp"
#include "io/xdmf.hpp"

namespace wanewall {
namespace {

namespace layout = record_layout;

template <class T>
hdf5::Dataset put(hdf5::Group& group, const std::string& name, const hdf5::Shape& shape,
                  const std::vector<T>& values, const layout::Dimension& dimension,
                  const std::string& description) {
  hdf5::Dataset dataset = group.create(name, shape, values);
  layout::describe(dataset, dimension, description);
  return dataset;
}

template <class T>
void put_list(hdf5::Group& group, const std::string& name, const std::vector<T>& values,
              const layout::Dimension& dimension, const std::string& description) {
  put(group, name, {values.size()}, values, dimension, description);
}

std::vector<double> list_of(const Vec3& v) {
  return {v.begin(), v.end()};
}

void write_scene(hdf5::File& file, const Scene& scene) {
  hdf5::Group group = file.create_group("scene");
  group.set_text("title", scene.title);
  group.set_text("file", scene.file);
  group.set_number("band_lo_hz", scene.band_lo_hz);
  group.set_number("band_hi_hz", scene.band_hi_hz);
  hdf5::Dataset text = group.create_text("text", scene.text);
  layout::describe(text, layout::dimensionless, "the scene file, word for word");
  std::vector<std::string> paths, values;
  std::vector<std::int64_t> by_default;
  for (const UsedValue& used : scene.used) {
    paths.push_back(used.path);
    values.push_back(used.value);
    by_default.push_back(used.by_default ? 1 : 0);
  }
  put_list(group, "used_path", paths, layout::dimensionless, "keys of the values that the run used");
  put_list(group, "used_value", values, layout::dimensionless, "the values, each with its unit");
  put_list(group, "used_by_default", by_default, layout::dimensionless, "1 where the scene left the key out");
}

void write_mesh(hdf5::File& file, const Problem& problem) {
  const Lattice& lattice = problem.lattice;
  hdf5::Group group = file.create_group("mesh");
  for (const Axis axis : all_axes)
    put_list(group, std::string(name_of(axis)), lattice.along(axis).all_m(), layout::length,
             fmt::format("{} of all nodes of the lattice, clear volume and shell [m]", name_of(axis)));
  std::vector<std::string> sides, kinds;
  for (const Side side : all_sides) {
    sides.emplace_back(name_of(side));
    kinds.push_back(layout::word_of(problem.face(side).kind));
  }
  group.set_number("dt", lattice.dt_s);
  group.set_number("timeUnitSI", 1.0);
  group.set_texts("sides", sides);
  group.set_texts("faceKinds", kinds);
  group.set_integers("shellCells", {lattice.shell_cells.begin(), lattice.shell_cells.end()});
  group.set_integers("periodic", {lattice.periodic.begin(), lattice.periodic.end()});
  group.set_text("precision", layout::word_of(problem.precision));
}

void write_shell(hdf5::File& file, const Problem& problem) {
  hdf5::Group shell = file.create_group("shell");
  for (const Side side : all_sides) {
    const Face& face = problem.face(side);
    hdf5::Group group = shell.create_group(std::string(name_of(side)));
    group.set_text("kind", layout::word_of(face.kind));
    group.set_integer("oneWayOrder", face.one_way_order);
    layout::for_each_table(face, [&](const char* name, const auto& dimension, const char* description,
                                     const std::vector<double>& values) {
      if (face.cells() > 0) put_list(group, name, values, dimension, description);
    });
  }
}

void write_points(hdf5::File& file, const std::vector<PointSeries>& points, double dt_s) {
  hdf5::Group group = file.create_group("points");
  for (const PointSeries& point : points) {
    hdf5::Group g = group.create_group(layout::sanitised(point.name));
    g.set_text("name", point.name);
    g.set_numbers("position", list_of(point.position_m));
    std::vector<double> time_e_s(point.values[index_of(Component::ex)].size());
    std::vector<double> time_h_s(point.values[index_of(Component::hx)].size());
    for (std::size_t n = 0; n < time_e_s.size(); ++n) time_e_s[n] = time_of_e_s(static_cast<long>(n), dt_s);
    for (std::size_t n = 0; n < time_h_s.size(); ++n) time_h_s[n] = time_of_h_s(static_cast<long>(n), dt_s);
    put_list(g, "time_E", time_e_s, layout::time, "times of Ex, Ey, Ez [s]");
    put_list(g, "time_H", time_h_s, layout::time, "times of Hx, Hy, Hz [s]");
    for (const Component c : all_components)
      put_list(g, std::string(name_of(c)), point.values[static_cast<std::size_t>(index_of(c))],
               layout::field_of(c),
               fmt::format("{} [{}] at point \"{}\", one entry per step", name_of(c), layout::unit_of(c),
                           point.name));
  }
}

void write_energy(hdf5::File& file, const EnergySeries& energy, double dt_s) {
  hdf5::Group group = file.create_group("energy");
  std::vector<double> time_s;
  for (const long step : energy.step) time_s.push_back(time_of_e_s(step, dt_s));
  put_list(group, "step", std::vector<std::int64_t>(energy.step.begin(), energy.step.end()),
           layout::dimensionless, "time steps at which the energy was taken");
  put_list(group, "time", time_s, layout::time, "their times [s]: E at n dt, H at (n - 1/2) dt");
  put_list(group, "energy", energy.joule, layout::energy, "field energy in the clear volume [J]");
}

void write_audit_face(hdf5::Group& audit, const AuditFace& face, std::size_t n_frequencies) {
  hdf5::Group group = audit.create_group(std::string(name_of(face.side)));
  group.set_integer("isUniform", face.is_uniform ? 1 : 0);
  group.set_integer("isLayered", face.is_layered ? 1 : 0);
  group.set_number("permittivityRel", face.permittivity_rel);
  group.set_number("permeabilityRel", face.permeability_rel);
  group.set_number("conductivitySPerM", face.conductivity_s_per_m);
  group.set_number("magneticConductivityOhmPerM", face.magnetic_conductivity_ohm_per_m);
  group.set_integer("clearIsUniform", face.clear_is_uniform ? 1 : 0);
  group.set_integer("goesOnToWall", face.goes_on_to_wall ? 1 : 0);
  for (const AuditPlane& plane : face.planes) {
    const hdf5::Shape shape{n_frequencies, static_cast<std::size_t>(plane.shape[0]),
                            static_cast<std::size_t>(plane.shape[1])};
    hdf5::Dataset dataset =
        put(group, fmt::format("{}_{}", name_of(plane.component), plane.normal_index), shape, plane.sums,
            layout::spectrum_of(plane.component),
            fmt::format("running DFT of {} [{} s], index order [frequency][first][second]",
                        name_of(plane.component), layout::unit_of(plane.component)));
    dataset.set_text("component", std::string(name_of(plane.component)));
    dataset.set_integer("normalIndex", plane.normal_index);
    dataset.set_number("normalPosition", plane.normal_m);
  }
}

void write_audit(hdf5::File& file, const AuditRecord& audit) {
  hdf5::Group group = file.create_group("shell_audit");
  group.set_integer("sampleEvery", audit.sample_every);
  group.set_numbers("incidentDirection", list_of(audit.incident_direction));
  group.set_number("incidentImpedance", audit.incident_impedance_ohm);
  put_list(group, "frequency", audit.frequencies_hz, layout::frequency, "frequencies of the audit [Hz]");
  put_list(group, "incident_spectrum", audit.incident_v_s_per_m, layout::electric_spectrum,
           "|E| of the incident plane wave at its phase origin [V s/m]; empty without one");
  hdf5::Group faces = group.create_group("faces");
  for (const AuditFace& face : audit.faces) write_audit_face(faces, face, audit.frequencies_hz.size());
  hdf5::Group profiles = group.create_group("profiles");
  for (const AuditFace& face : audit.faces) {
    if (face.profile.empty()) continue;
    hdf5::Group profile = profiles.create_group(std::string(name_of(face.side)));
    layout::for_each_list(face.profile, [&](const char* name, const auto& dimension, const char* description,
                                            const std::vector<double>& values) {
      put_list(profile, name, values, dimension, description);
    });
  }
}

void write_run(hdf5::File& file, const RunResult& result) {
  hdf5::Group group = file.create_group("run");
  group.set_integer("steps", result.steps);
  group.set_text("reason", layout::word_of(result.reason));
  group.set_text("notFiniteWhere", result.not_finite_where);
  group.set_integer("threads", result.threads);
  group.set_text("vectorCode", result.vector_code);
  group.set_number("buildSeconds", result.build_seconds);
  group.set_number("marchSeconds", result.march_seconds);
}

void write_provenance(hdf5::File& file, const Provenance& provenance) {
  hdf5::Group group = file.create_group("provenance");
  group.set_text("programVersion", provenance.program_version);
  group.set_text("buildType", provenance.build_type);
  group.set_text("compiler", provenance.compiler);
  group.set_text("processor", provenance.processor);
  group.set_text("hostSystem", provenance.host_system);
  group.set_text("startedUtc", provenance.started_utc);
  group.set_text("endedUtc", provenance.ended_utc);
  group.set_integer("threads", provenance.threads);
  group.set_text("vectorCode", provenance.vector_code);
  group.set_text("schedule", provenance.schedule);
  if (provenance.disk_wait_s) group.set_number("diskWaitSeconds", *provenance.disk_wait_s);
  if (!provenance.witness_of.empty()) {
    group.set_text("witnessOf", provenance.witness_of);
    group.set_text("witnessFaces", provenance.witness_faces);
    group.set_text("witnessLayer", provenance.witness_layer);
  }
  file.set_text("software", "Wanewall");
  file.set_text("softwareVersion", provenance.program_version);
  file.set_text("date", provenance.started_utc);
  file.set_text("machine", provenance.host_system);
}

}  // namespace

struct RecordWriter::State {
  State(const std::string& path, const Scene& scene)
      : target(path),
        file(hdf5::File::create(target)),
        lattice(scene.problem.lattice),
        meshes(file, lattice, scene.problem.recording.snapshots) {}

  AtomicFile target;
  hdf5::File file;
  Lattice lattice;
  MeshRecordWriter meshes;
  bool finished = false;
};

RecordWriter::RecordWriter(const std::string& path, const Scene& scene) {
  std::vector<std::string> snapshots, points;
  for (const SnapshotRequest& request : scene.problem.recording.snapshots) snapshots.push_back(request.name);
  for (const PointRequest& request : scene.problem.recording.points) points.push_back(request.name);
  layout::refuse_collisions(snapshots, "snapshots", path);
  layout::refuse_collisions(points, "points", path);

  state_ = std::make_unique<State>(path, scene);
  hdf5::File& file = state_->file;
  file.set_text("openPMD", "1.1.0");
  file.set_uint32("openPMDextension", 0);
  file.set_text("basePath", "/data/%T/");
  file.set_text("iterationEncoding", "groupBased");
  file.set_text("iterationFormat", "/data/%T/");
  file.set_text("contents", layout::program_mark);
  file.set_integer("layoutVersion", layout::version);
  write_scene(file, scene);
  write_mesh(file, scene.problem);
  write_shell(file, scene.problem);
}

RecordWriter::~RecordWriter() = default;

void RecordWriter::take(Snapshot snapshot) {
  state_->meshes.take(snapshot);
}

void RecordWriter::finish(const RunResult& result, const Provenance& provenance, bool xdmf) {
  if (state_->finished) throw std::logic_error("a record can be finished only once");
  state_->finished = true;
  hdf5::File& file = state_->file;
  state_->meshes.finish();
  write_points(file, result.points, state_->lattice.dt_s);
  write_energy(file, result.energy, state_->lattice.dt_s);
  write_audit(file, result.audit);
  write_run(file, result);
  write_provenance(file, provenance);
  file.close();
  state_->target.commit();
  if (!xdmf) return;
  const std::string& path = state_->target.final_path();
  std::vector<XdmfSeries> series;
  for (std::size_t n = 0; n < state_->meshes.lists().size(); ++n)
    series.push_back({state_->meshes.lists()[n], state_->meshes.is_single(n)});
  write_atomically(path + ".xdmf", xdmf_text(path, series));
}

}  // namespace wanewall
