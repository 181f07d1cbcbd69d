#include <fmt/format.h>

#include <cmath>
#include <limits>
#include <new>
#include <stdexcept>

#include "io/errors.hpp"
#include "io/hdf5.hpp"
#include "io/record.hpp"
#include "io/record_layout.hpp"

namespace wanewall {
namespace {

namespace layout = record_layout;

constexpr std::size_t index(Component c) {
  return static_cast<std::size_t>(index_of(c));
}
constexpr std::size_t index(Axis a) {
  return static_cast<std::size_t>(index_of(a));
}

template <std::size_t n, class Out, class In>
std::array<Out, n> array_of(const std::vector<In>& values, const hdf5::Object& owner, const char* what) {
  if (values.size() != n)
    owner.refuse(fmt::format("{} has {} entries instead of {}", what, values.size(), n));
  std::array<Out, n> result{};
  for (std::size_t i = 0; i < n; ++i) result[i] = static_cast<Out>(values[i]);
  return result;
}

int small_integer(std::int64_t value, const hdf5::Object& owner, const char* what) {
  if (value < 0 || value > std::numeric_limits<int>::max())
    owner.refuse(fmt::format("{} is {}, which cannot be", what, value));
  return static_cast<int>(value);
}

template <class T>
std::vector<T> list_in(const hdf5::Group& group, const std::string& name) {
  const hdf5::Dataset dataset = group.dataset(name);
  if (dataset.shape().size() != 1) dataset.refuse("it is not a plain list");
  return dataset.read<T>();
}

std::vector<long> steps_in(const hdf5::Group& group) {
  const std::vector<std::int64_t> steps = list_in<std::int64_t>(group, "step");
  return {steps.begin(), steps.end()};
}

void read_scene(const hdf5::File& file, Record& record) {
  const hdf5::Group group = file.group("scene");
  record.title = group.text("title");
  record.band_lo_hz = group.number("band_lo_hz");
  record.band_hi_hz = group.number("band_hi_hz");
  const std::vector<std::string> text = list_in<std::string>(group, "text");
  if (text.size() != 1) group.refuse("it holds no scene text");
  record.scene_text = text.front();
  const auto paths = list_in<std::string>(group, "used_path");
  const auto values = list_in<std::string>(group, "used_value");
  const auto by_default = list_in<std::int64_t>(group, "used_by_default");
  if (values.size() != paths.size() || by_default.size() != paths.size())
    group.refuse("its lists of used values differ in length");
  for (std::size_t n = 0; n < paths.size(); ++n)
    record.used.push_back({paths[n], values[n], by_default[n] != 0});
}

void read_mesh(const hdf5::File& file, Record& record) {
  const hdf5::Group group = file.group("mesh");
  for (const Axis axis : all_axes)
    record.lattice.lines[index(axis)] = MeshLines(list_in<double>(group, std::string(name_of(axis))));
  record.lattice.dt_s = group.number("dt");
  if (!(record.lattice.dt_s > 0.0) || !std::isfinite(record.lattice.dt_s))
    group.refuse("its time step is not positive");
  record.lattice.shell_cells = array_of<6, int>(group.integers("shellCells"), group, "shellCells");
  record.lattice.periodic = array_of<3, bool>(group.integers("periodic"), group, "periodic");
  for (const Side side : all_sides) {
    const int cells = record.lattice.shell(side);
    if (cells < 0 || cells > record.lattice.cells(axis_of(side)))
      group.refuse(fmt::format("its shell has {} cells on {}", cells, name_of(side)));
  }
  const std::vector<std::string> kinds = group.texts("faceKinds");
  if (kinds.size() != all_sides.size()) group.refuse("it does not name six face kinds");
  for (std::size_t n = 0; n < kinds.size(); ++n)
    record.result.audit.shell[n].kind = layout::face_kind_of(kinds[n]);
  record.precision = layout::precision_of(group.text("precision"));
}

void read_shell(const hdf5::File& file, Record& record) {
  if (!file.has("shell")) return;  // layout 1 did not say what the layers were made of
  const hdf5::Group shell = file.group("shell");
  for (const Side side : all_sides) {
    const hdf5::Group group = shell.group(std::string(name_of(side)));
    Face& face = record.result.audit.shell[static_cast<std::size_t>(index_of(side))];
    face.one_way_order = small_integer(group.integer("oneWayOrder"), group, "oneWayOrder");
    if (group.names().empty()) continue;
    std::size_t cells = 0;
    layout::for_each_table(face,
                           [&](const char* name, const auto&, const char*, std::vector<double>& values) {
                             values = list_in<double>(group, name);
                             if (cells == 0) cells = values.size();
                             if (values.size() != cells) group.refuse("its tables differ in length");
                           });
    if (face.cells() != record.lattice.shell(side)) group.refuse("its tables do not fit the lattice");
  }
}

void read_points(const hdf5::File& file, RunResult& result) {
  const hdf5::Group group = file.group("points");
  for (const std::string& name : group.names()) {
    const hdf5::Group g = group.group(name);
    PointSeries point;
    point.name = g.text("name");
    point.position_m = array_of<3, double>(g.numbers("position"), g, "position");
    for (const Component c : all_components)
      point.values[index(c)] = list_in<double>(g, std::string(name_of(c)));
    result.points.push_back(std::move(point));
  }
}

void read_energy(const hdf5::File& file, RunResult& result) {
  const hdf5::Group group = file.group("energy");
  result.energy.step = steps_in(group);
  result.energy.joule = list_in<double>(group, "energy");
  if (result.energy.step.size() != result.energy.joule.size()) group.refuse("its lists differ in length");
}

AuditPlane read_audit_plane(const hdf5::Dataset& dataset, std::size_t n_frequencies,
                            AuditPlanes audit_planes) {
  AuditPlane plane;
  plane.component = layout::component_of(dataset.text("component"));
  plane.normal_index = small_integer(dataset.integer("normalIndex"), dataset, "normalIndex");
  plane.normal_m = dataset.number("normalPosition");
  const hdf5::Shape shape = dataset.shape();
  if (shape.size() != 3 || shape[0] != n_frequencies)
    dataset.refuse("its shape does not fit the frequencies");
  for (std::size_t n = 0; n < 2; ++n)
    plane.shape[n] = small_integer(static_cast<std::int64_t>(shape[n + 1]), dataset, "an extent");
  if (audit_planes == AuditPlanes::load) plane.sums = dataset.read<std::complex<double>>();
  return plane;
}

AuditFace read_audit_face(const hdf5::Group& group, const std::string& name, std::size_t n_frequencies,
                          AuditPlanes audit_planes) {
  AuditFace face;
  face.side = layout::side_of_word(name);
  face.is_uniform = group.integer("isUniform") != 0;
  face.is_layered = group.integer("isLayered") != 0;
  face.permittivity_rel = group.number("permittivityRel");
  face.permeability_rel = group.number("permeabilityRel");
  face.conductivity_s_per_m = group.number("conductivitySPerM");
  face.clear_is_uniform = face.is_uniform;
  if (group.has_attribute("goesOnToWall")) {  // since layout 2
    face.magnetic_conductivity_ohm_per_m = group.number("magneticConductivityOhmPerM");
    face.clear_is_uniform = group.integer("clearIsUniform") != 0;
    face.goes_on_to_wall = group.integer("goesOnToWall") != 0;
  }
  for (const std::string& plane : group.names())
    face.planes.push_back(read_audit_plane(group.dataset(plane), n_frequencies, audit_planes));
  return face;
}

void read_audit(const hdf5::File& file, AuditRecord& audit, AuditPlanes audit_planes) {
  const hdf5::Group group = file.group("shell_audit");
  audit.sample_every = small_integer(group.integer("sampleEvery"), group, "sampleEvery");
  audit.incident_direction =
      array_of<3, double>(group.numbers("incidentDirection"), group, "incidentDirection");
  audit.incident_impedance_ohm = group.number("incidentImpedance");
  audit.frequencies_hz = list_in<double>(group, "frequency");
  audit.incident_v_s_per_m = list_in<std::complex<double>>(group, "incident_spectrum");
  if (!audit.incident_v_s_per_m.empty() && audit.incident_v_s_per_m.size() != audit.frequencies_hz.size())
    group.refuse("the incident spectrum does not fit the frequencies");
  const hdf5::Group faces = group.group("faces");
  for (const std::string& name : faces.names())
    audit.faces.push_back(
        read_audit_face(faces.group(name), name, audit.frequencies_hz.size(), audit_planes));
  if (!group.has("profiles")) return;
  const hdf5::Group profiles = group.group("profiles");
  for (AuditFace& face : audit.faces) {
    const std::string name(name_of(face.side));
    if (!profiles.has(name)) continue;
    const hdf5::Group profile = profiles.group(name);
    layout::for_each_list(face.profile,
                          [&](const char* list, const auto&, const char*, std::vector<double>& values) {
                            values = list_in<double>(profile, list);
                          });
  }
}

void read_run(const hdf5::File& file, RunResult& result) {
  const hdf5::Group group = file.group("run");
  result.steps = group.integer("steps");
  result.reason = layout::stop_reason_of(group.text("reason"));
  result.not_finite_where = group.text("notFiniteWhere");
  result.threads = small_integer(group.integer("threads"), group, "threads");
  result.vector_code = group.text("vectorCode");
  result.build_seconds = group.number("buildSeconds");
  result.march_seconds = group.number("marchSeconds");
}

Provenance read_provenance(const hdf5::File& file) {
  const hdf5::Group group = file.group("provenance");
  Provenance p;
  p.program_version = group.text("programVersion");
  p.build_type = group.text("buildType");
  p.compiler = group.text("compiler");
  p.processor = group.text("processor");
  p.host_system = group.text("hostSystem");
  p.started_utc = group.text("startedUtc");
  p.ended_utc = group.text("endedUtc");
  p.threads = small_integer(group.integer("threads"), group, "threads");
  p.vector_code = group.text("vectorCode");
  p.schedule = group.text("schedule");
  if (group.has_attribute("diskWaitSeconds")) p.disk_wait_s = group.number("diskWaitSeconds");
  if (group.has_attribute("witnessOf")) {
    p.witness_of = group.text("witnessOf");
    p.witness_faces = group.text("witnessFaces");
    p.witness_layer = group.text("witnessLayer");
  }
  return p;
}

SnapshotList read_snapshot_list(const hdf5::Group& group, const std::string& name) {
  SnapshotList list;
  list.name = name;
  list.component = layout::component_of(group.text("component"));
  list.steps = steps_in(group);
  list.times_s = list_in<double>(group, "time");
  if (list.steps.size() != list.times_s.size()) group.refuse("its steps and times differ in number");
  for (const Axis axis : all_axes) {
    std::vector<double>& points_m = list.positions_m[index(axis)];
    points_m = list_in<double>(group, std::string(name_of(axis)));
    bool increases = !points_m.empty() && points_m.size() <= std::numeric_limits<int>::max();
    for (std::size_t n = 0; n < points_m.size(); ++n)
      increases = increases && std::isfinite(points_m[n]) && (n == 0 || points_m[n - 1] < points_m[n]);
    if (!increases) group.refuse("its coordinates do not increase");
  }
  return list;
}

std::vector<SnapshotList> read_snapshot_lists(const hdf5::File& file) {
  std::vector<SnapshotList> lists;
  if (!file.has("snapshots")) return lists;  // nothing was asked for
  const hdf5::Group group = file.group("snapshots");
  for (const std::string& record : group.names()) {
    const hdf5::Group members = group.group(record);
    const std::string name = members.text("name");
    for (const std::string& member : members.names())
      lists.push_back(read_snapshot_list(members.group(member), name));
  }
  return lists;
}

void require_record(const hdf5::File& file, const std::string& path) {
  if (!file.has_attribute("contents") || file.text("contents") != layout::program_mark)
    throw FileError(fmt::format("{}: this HDF5 file is not a record of a run", path));
  const std::int64_t version = file.integer("layoutVersion");
  if (version > layout::version)
    throw FileError(
        fmt::format("{}: the record has layout {}, this program reads up to {} / use a newer program", path,
                    version, layout::version));
}

/// What damaged contents can throw besides a FileError becomes one.
template <class Work>
auto reading(const std::string& path, const Work& work) {
  try {
    return work();
  } catch (const std::invalid_argument& e) {
    throw FileError(fmt::format("{}: the record is damaged: {}", path, e.what()));
  } catch (const std::bad_alloc&) {
    throw FileError(fmt::format("{}: not enough memory to read the record, or it is damaged", path));
  }
}

}  // namespace

struct Record::State {
  hdf5::File file;
  std::string path;

  hdf5::Dataset dataset_of(const SnapshotList& list, std::size_t which) const {
    if (which >= list.steps.size()) throw std::out_of_range("no such step in the snapshot");
    return file.group("data")
        .group(layout::iteration_of(list.steps[which]))
        .group("meshes")
        .group(layout::mesh_record_of(list.name, list.component))
        .dataset(layout::member_of(list.component));
  }
};

Record::Record(const std::string& path, AuditPlanes audit_planes)
    : state_(std::make_unique<State>(State{hdf5::File::open(path), path})) {
  const hdf5::File& file = state_->file;
  reading(path, [&] {
    require_record(file, path);
    read_scene(file, *this);
    read_mesh(file, *this);
    read_shell(file, *this);
    read_points(file, result);
    read_energy(file, result);
    read_audit(file, result.audit, audit_planes);
    read_run(file, result);
    provenance = read_provenance(file);
    snapshots = read_snapshot_lists(file);
  });
}

Record::~Record() = default;

namespace {

hdf5::Shape shape_zyx(const SnapshotList& list) {
  return {list.positions_m[2].size(), list.positions_m[1].size(), list.positions_m[0].size()};
}

template <class T>
std::vector<T> back_to_xyz(const std::vector<T>& values, const hdf5::Shape& zyx) {
  std::vector<T> result(values.size());
  const auto [nz, ny, nx] = std::array{zyx[0], zyx[1], zyx[2]};
  for (std::size_t i = 0; i < nx; ++i)
    for (std::size_t j = 0; j < ny; ++j)
      for (std::size_t k = 0; k < nz; ++k) result[(i * ny + j) * nz + k] = values[(k * ny + j) * nx + i];
  return result;
}

void require_shape(const hdf5::Dataset& dataset, const SnapshotList& list) {
  if (dataset.shape() != shape_zyx(list)) dataset.refuse("its shape does not fit the snapshot's points");
}

}  // namespace

Snapshot Record::load(const SnapshotList& list, std::size_t which) const {
  return reading(state_->path, [&] {
    const hdf5::Dataset dataset = state_->dataset_of(list, which);
    require_shape(dataset, list);
    Snapshot snapshot{list.name,      list.steps[which], list.times_s[which],
                      list.component, list.positions_m,  {}};
    if (dataset.entry() == hdf5::Entry::float32)
      snapshot.values = back_to_xyz(dataset.read<float>(), shape_zyx(list));
    else
      snapshot.values = back_to_xyz(dataset.read<double>(), shape_zyx(list));
    return snapshot;
  });
}

std::vector<double> Record::load_part(const SnapshotList& list, std::size_t which, const Index3& begin,
                                      const Index3& end) const {
  hdf5::Shape first(3), count(3);
  for (std::size_t a = 0; a < 3; ++a) {
    if (begin[a] < 0 || end[a] < begin[a]) throw std::out_of_range("no such part of a snapshot");
    first[2 - a] = static_cast<std::size_t>(begin[a]);
    count[2 - a] = static_cast<std::size_t>(end[a] - begin[a]);
  }
  return reading(state_->path, [&] {
    const hdf5::Dataset dataset = state_->dataset_of(list, which);
    require_shape(dataset, list);
    return back_to_xyz(dataset.read_window<double>(first, count), count);
  });
}

}  // namespace wanewall
