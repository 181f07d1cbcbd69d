#include "io/record_mesh.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <map>
#include <stdexcept>

#include "io/record_layout.hpp"

namespace wanewall {
namespace {

namespace layout = record_layout;

constexpr double even_tolerance = 1e-9;  // of a spacing

std::vector<double> slowest_first(const Vec3& v) {
  return {v[2], v[1], v[0]};
}

bool is_even(const std::vector<double>& points_m, double spacing_m) {
  for (std::size_t i = 1; i < points_m.size(); ++i)
    if (std::abs(points_m[i] - points_m[0] - static_cast<double>(i) * spacing_m) > even_tolerance * spacing_m)
      return false;
  return true;
}

/// Mean spacing of the list with the most points; the fallback where no list has two.
double spacing_along(std::size_t axis, const std::vector<std::array<std::vector<double>, 3>>& components,
                     double fallback_m) {
  std::size_t most = 1;
  double spacing_m = fallback_m;
  for (const auto& component : components) {
    const std::vector<double>& points_m = component[axis];
    if (points_m.size() <= most) continue;
    most = points_m.size();
    spacing_m = (points_m.back() - points_m.front()) / static_cast<double>(most - 1);
  }
  return spacing_m;
}

template <class T>
std::vector<T> transposed(const std::vector<T>& values, const hdf5::Shape& xyz) {
  std::vector<T> result(values.size());
  const auto [nx, ny, nz] = std::array{xyz[0], xyz[1], xyz[2]};
  for (std::size_t k = 0; k < nz; ++k)
    for (std::size_t j = 0; j < ny; ++j)
      for (std::size_t i = 0; i < nx; ++i) result[(k * ny + j) * nx + i] = values[(i * ny + j) * nz + k];
  return result;
}

std::string description_of(const SnapshotList& list) {
  return fmt::format("{} [{}] of snapshot \"{}\", index order [z][y][x]", name_of(list.component),
                     layout::unit_of(list.component), list.name);
}

}  // namespace

MeshGrid mesh_grid_of(const std::vector<std::array<std::vector<double>, 3>>& components,
                      const Vec3& fallback_spacing_m) {
  MeshGrid grid;
  grid.positions.resize(components.size());
  for (std::size_t axis = 0; axis < 3; ++axis) {
    const double spacing_m = spacing_along(axis, components, fallback_spacing_m[axis]);
    double first_m = components.front()[axis].front();
    for (const auto& component : components) {
      first_m = std::min(first_m, component[axis].front());
      grid.is_cartesian = grid.is_cartesian && is_even(component[axis], spacing_m);
    }
    grid.spacing_m[axis] = spacing_m;
    grid.offset_m[axis] = first_m;
    for (std::size_t n = 0; n < components.size(); ++n) {
      const double position = (components[n][axis].front() - first_m) / spacing_m;
      // The standard leaves no room for a component that starts a whole spacing later than another.
      if (position >= 1.0) grid.is_cartesian = false;
      grid.positions[n][axis] = position - std::floor(position);
    }
  }
  return grid;
}

MeshRecordWriter::MeshRecordWriter(hdf5::File& file, const Lattice& lattice,
                                   std::vector<SnapshotRequest> requests)
    : file_(file), lattice_(lattice), requests_(std::move(requests)) {
  file_.create_group("data");
}

void MeshRecordWriter::take(const Snapshot& snapshot) {
  const hdf5::Shape xyz{snapshot.positions_m[0].size(), snapshot.positions_m[1].size(),
                        snapshot.positions_m[2].size()};
  const std::size_t n_values = std::visit([](const auto& values) { return values.size(); }, snapshot.values);
  if (n_values == 0 || n_values != hdf5::n_entries(xyz))
    throw std::logic_error(fmt::format("snapshot \"{}\" has {} values for {} points", snapshot.name, n_values,
                                       hdf5::n_entries(xyz)));
  SnapshotList& list = lists_[list_of(snapshot)];
  if (list.positions_m != snapshot.positions_m)
    throw std::logic_error(fmt::format("snapshot \"{}\" has moved between two steps", snapshot.name));

  hdf5::Group meshes = meshes_of(snapshot.step);
  const std::string record = layout::mesh_record_of(snapshot.name, snapshot.component);
  hdf5::Group group = meshes.has(record) ? meshes.group(record) : meshes.create_group(record);
  const hdf5::Shape zyx{xyz[2], xyz[1], xyz[0]};
  hdf5::Dataset dataset = std::visit(
      [&](const auto& values) {
        return group.create(layout::member_of(snapshot.component), zyx, transposed(values, xyz));
      },
      snapshot.values);
  layout::describe(dataset, layout::field_of(snapshot.component), description_of(list));
  list.steps.push_back(snapshot.step);
  list.times_s.push_back(snapshot.time_s);
}

std::size_t MeshRecordWriter::list_of(const Snapshot& snapshot) {
  const auto found = std::find_if(lists_.begin(), lists_.end(), [&](const SnapshotList& list) {
    return list.name == snapshot.name && list.component == snapshot.component;
  });
  if (found != lists_.end()) return static_cast<std::size_t>(found - lists_.begin());
  lists_.push_back({snapshot.name, snapshot.component, {}, {}, snapshot.positions_m});
  is_single_.push_back(std::holds_alternative<std::vector<float>>(snapshot.values));
  return lists_.size() - 1;
}

hdf5::Group MeshRecordWriter::meshes_of(long step) {
  hdf5::Group data = file_.group("data");
  const std::string name = layout::iteration_of(step);
  if (data.has(name)) return data.group(name).group("meshes");
  hdf5::Group iteration = data.create_group(name);
  iteration.set_number("time", time_of_e_s(step, lattice_.dt_s));
  iteration.set_number("dt", lattice_.dt_s);
  iteration.set_number("timeUnitSI", 1.0);
  return iteration.create_group("meshes");
}

Vec3 MeshRecordWriter::fallback_spacing_m(const SnapshotList& list) const {
  const auto request = std::find_if(requests_.begin(), requests_.end(),
                                    [&](const SnapshotRequest& r) { return r.name == list.name; });
  Vec3 spacing_m{};
  for (const Axis axis : all_axes) {
    const auto a = static_cast<std::size_t>(index_of(axis));
    const MeshLines& lines = lattice_.along(axis);
    const int node = lines.nearest_node(list.positions_m[a].front());
    const bool is_strided = request != requests_.end() && request->normal != axis;
    spacing_m[a] = (is_strided ? request->stride : 1) * lines.cell_m(std::min(node, lines.cells() - 1));
  }
  return spacing_m;
}

void MeshRecordWriter::finish() {
  if (empty()) return;
  file_.set_text("meshesPath", "meshes/");
  hdf5::Group snapshots = file_.create_group("snapshots");
  std::vector<std::string> done;
  for (const SnapshotList& list : lists_) {
    const std::string record = layout::mesh_record_of(list.name, list.component);
    if (!snapshots.has(record)) snapshots.create_group(record).set_text("name", list.name);
    hdf5::Group group = snapshots.group(record).create_group(layout::member_of(list.component));
    group.set_text("component", std::string(name_of(list.component)));
    auto steps = group.create("step", {list.steps.size()},
                              std::vector<std::int64_t>(list.steps.begin(), list.steps.end()));
    layout::describe(steps, layout::dimensionless, "time steps at which the component was recorded");
    auto times = group.create("time", {list.times_s.size()}, list.times_s);
    layout::describe(times, layout::time, "times at which the component was recorded [s]");
    for (const Axis axis : all_axes) {
      const std::vector<double>& points_m = list.positions_m[static_cast<std::size_t>(index_of(axis))];
      auto points = group.create(std::string(name_of(axis)), {points_m.size()}, points_m);
      layout::describe(points, layout::length,
                       fmt::format("{} of the points of {} [m]", name_of(axis), name_of(list.component)));
    }
    if (std::find(done.begin(), done.end(), record) == done.end()) {
      finish_record(record);
      done.push_back(record);
    }
  }
}

void MeshRecordWriter::finish_record(const std::string& record) {
  std::vector<const SnapshotList*> members;
  std::vector<std::array<std::vector<double>, 3>> positions_m;
  std::map<long, std::vector<std::size_t>> members_at;  // step -> members
  for (const SnapshotList& list : lists_) {
    if (layout::mesh_record_of(list.name, list.component) != record) continue;
    for (const long step : list.steps) members_at[step].push_back(members.size());
    members.push_back(&list);
    positions_m.push_back(list.positions_m);
  }
  const MeshGrid grid = mesh_grid_of(positions_m, fallback_spacing_m(*members.front()));
  const Component component = members.front()->component;
  const layout::Dimension dimension = layout::field_of(component);

  for (const auto& [step, present] : members_at) {
    hdf5::Group group = meshes_of(step).group(record);
    group.set_text("geometry", grid.is_cartesian ? "cartesian" : "other");
    group.set_text("dataOrder", "C");
    group.set_texts("axisLabels", {"z", "y", "x"});
    group.set_numbers("gridSpacing", slowest_first(grid.spacing_m));
    group.set_numbers("gridGlobalOffset", slowest_first(grid.offset_m));
    group.set_number("gridUnitSI", 1.0);
    group.set_numbers("unitDimension", {dimension.begin(), dimension.end()});
    group.set_number("timeOffset", is_electric(component) ? 0.0 : 0.5 * lattice_.dt_s);
    group.set_text(
        "description",
        fmt::format("points of each component: /snapshots/{}{}", record,
                    grid.is_cartesian ? "" : "; the spacing here is a mean, the points are uneven"));
    for (const std::size_t n : present)
      group.dataset(layout::member_of(members[n]->component))
          .set_numbers("position", slowest_first(grid.positions[n]));
  }
}

}  // namespace wanewall
