// A record held against the openPMD standard 1.1.0 (6 February 2018; its STANDARD.md, sections on the
// hierarchy and on mesh records), read through the bare C interface of HDF5 and nothing of ours.
#include <hdf5.h>

#include <catch2/catch.hpp>
#include <functional>
#include <string>
#include <utility>
#include <vector>

#include "record_fixture.hpp"

using namespace wanewall;
using namespace wanewall::test;

namespace {

enum class Wanted { ascii, uint32, real, float64 };

/// An object that closes itself; the test's own, so that nothing is shared with the code under test.
struct Closing {
  hid_t id;
  herr_t (*close)(hid_t);
  Closing(hid_t opened, herr_t (*closer)(hid_t)) : id(opened), close(closer) {}
  Closing(const Closing&) = delete;
  Closing& operator=(const Closing&) = delete;
  ~Closing() {
    if (id >= 0) close(id);
  }
};

std::vector<std::string> children(hid_t group) {
  std::vector<std::string> names;
  H5Literate(
      group, H5_INDEX_NAME, H5_ITER_INC, nullptr,
      [](hid_t, const char* name, const H5L_info_t*, void* data) -> herr_t {
        static_cast<std::vector<std::string>*>(data)->emplace_back(name);
        return 0;
      },
      &names);
  return names;
}

bool type_is(hid_t type, Wanted wanted) {
  switch (wanted) {
    case Wanted::ascii:
      return H5Tget_class(type) == H5T_STRING && H5Tis_variable_str(type) == 0 &&
             H5Tget_cset(type) == H5T_CSET_ASCII;
    case Wanted::uint32:
      return H5Tget_class(type) == H5T_INTEGER && H5Tget_size(type) == 4 && H5Tget_sign(type) == H5T_SGN_NONE;
    case Wanted::real:
      return H5Tget_class(type) == H5T_FLOAT;
    case Wanted::float64:
      return H5Tget_class(type) == H5T_FLOAT && H5Tget_size(type) == 8;
  }
  return false;
}

std::vector<std::string> texts(hid_t object, const char* name) {
  const Closing attribute(H5Aopen(object, name, H5P_DEFAULT), H5Aclose);
  const Closing type(H5Aget_type(attribute.id), H5Tclose);
  const Closing space(H5Aget_space(attribute.id), H5Sclose);
  const auto n = static_cast<std::size_t>(H5Sget_simple_extent_npoints(space.id));
  const std::size_t bytes = H5Tget_size(type.id);
  std::string all(n * bytes, '\0');
  H5Aread(attribute.id, type.id, all.data());
  std::vector<std::string> result;
  for (std::size_t i = 0; i < n; ++i) result.emplace_back(all.substr(i * bytes, bytes).c_str());
  return result;
}

std::vector<double> numbers(hid_t object, const char* name) {
  const Closing attribute(H5Aopen(object, name, H5P_DEFAULT), H5Aclose);
  const Closing space(H5Aget_space(attribute.id), H5Sclose);
  std::vector<double> result(static_cast<std::size_t>(H5Sget_simple_extent_npoints(space.id)));
  H5Aread(attribute.id, H5T_NATIVE_DOUBLE, result.data());
  return result;
}

/// Collects what a file does against the standard.
class Checker {
 public:
  std::vector<std::string> complaints;

  void check_file(const std::string& path) {
    const Closing file(H5Fopen(path.c_str(), H5F_ACC_RDONLY, H5P_DEFAULT), H5Fclose);
    if (file.id < 0) return complain(path, "does not open");
    check_root(file.id);
    const Closing data(H5Gopen2(file.id, "/data", H5P_DEFAULT), H5Gclose);
    if (data.id < 0) return complain("/", "has no group data");
    for (const std::string& iteration : children(data.id)) check_iteration(data.id, iteration);
  }

 private:
  void complain(const std::string& where, const std::string& what) {
    complaints.push_back(where + " " + what);
  }

  /// True when the attribute is there with the right type and number of entries (0: any).
  bool need(hid_t object, const std::string& where, const char* name, Wanted wanted, hssize_t entries = 1) {
    if (H5Aexists(object, name) <= 0) return complain(where, std::string("lacks ") + name), false;
    const Closing attribute(H5Aopen(object, name, H5P_DEFAULT), H5Aclose);
    const Closing type(H5Aget_type(attribute.id), H5Tclose);
    const Closing space(H5Aget_space(attribute.id), H5Sclose);
    if (!type_is(type.id, wanted)) return complain(where, std::string("has another type for ") + name), false;
    if (entries != 0 && H5Sget_simple_extent_npoints(space.id) != entries)
      return complain(where, std::string("has another number of entries in ") + name), false;
    return true;
  }

  void need_text(hid_t object, const std::string& where, const char* name,
                 const std::vector<std::string>& allowed) {
    if (!need(object, where, name, Wanted::ascii)) return;
    const std::string text = texts(object, name).front();
    if (std::find(allowed.begin(), allowed.end(), text) == allowed.end())
      complain(where, std::string("has ") + name + " = " + text);
  }

  void check_root(hid_t root) {
    need_text(root, "/", "openPMD", {"1.1.0"});
    need(root, "/", "openPMDextension", Wanted::uint32);
    need_text(root, "/", "basePath", {"/data/%T/"});
    need_text(root, "/", "iterationEncoding", {"groupBased"});
    need_text(root, "/", "iterationFormat", {"/data/%T/"});
    need_text(root, "/", "meshesPath", {"meshes/"});
    for (const char* recommended : {"software", "softwareVersion", "date"})
      need(root, "/", recommended, Wanted::ascii);
  }

  void check_iteration(hid_t data, const std::string& name) {
    const std::string where = "/data/" + name;
    if (name.find_first_not_of("0123456789") != std::string::npos) complain(where, "is no iteration");
    const Closing iteration(H5Gopen2(data, name.c_str(), H5P_DEFAULT), H5Gclose);
    need(iteration.id, where, "time", Wanted::real);
    need(iteration.id, where, "dt", Wanted::real);
    need(iteration.id, where, "timeUnitSI", Wanted::float64);
    const Closing meshes(H5Gopen2(iteration.id, "meshes", H5P_DEFAULT), H5Gclose);
    if (meshes.id < 0) return complain(where, "has no meshes");
    for (const std::string& record : children(meshes.id))
      check_record(meshes.id, record, where + "/meshes/" + record);
  }

  void check_name(const std::string& name, const std::string& where) {
    const char* word_characters = "abcdefghijklmnopqrstuvwxyzABCDEFGHIJKLMNOPQRSTUVWXYZ0123456789_";
    if (name.empty() || name.find_first_not_of(word_characters) != std::string::npos)
      complain(where, "has a name that does not match \\w+");
  }

  void check_record(hid_t meshes, const std::string& name, const std::string& where) {
    check_name(name, where);
    const Closing record(H5Gopen2(meshes, name.c_str(), H5P_DEFAULT), H5Gclose);
    need_text(record.id, where, "geometry", {"cartesian", "other"});
    need_text(record.id, where, "dataOrder", {"C", "F"});
    need(record.id, where, "axisLabels", Wanted::ascii, 3);
    need(record.id, where, "gridSpacing", Wanted::real, 3);
    need(record.id, where, "gridGlobalOffset", Wanted::float64, 3);
    need(record.id, where, "gridUnitSI", Wanted::float64);
    need(record.id, where, "unitDimension", Wanted::float64, 7);
    need(record.id, where, "timeOffset", Wanted::real);
    const std::vector<std::string> components = children(record.id);
    if (components.empty()) complain(where, "has no components");
    for (const std::string& component : components) {
      check_name(component, where + "/" + component);
      check_component(record.id, component, where + "/" + component);
    }
  }

  void check_component(hid_t record, const std::string& name, const std::string& where) {
    const Closing dataset(H5Dopen2(record, name.c_str(), H5P_DEFAULT), H5Dclose);
    if (dataset.id < 0) return complain(where, "is no dataset");
    const Closing space(H5Dget_space(dataset.id), H5Sclose);
    if (H5Sget_simple_extent_ndims(space.id) != 3) complain(where, "is not 3-D");
    need(dataset.id, where, "unitSI", Wanted::float64);
    if (!need(dataset.id, where, "position", Wanted::real, 3)) return;
    for (const double position : numbers(dataset.id, "position"))
      if (!(position >= 0.0 && position < 1.0)) complain(where, "has a position outside [0, 1)");
  }
};

std::vector<std::string> complaints_about(const std::string& path) {
  Checker checker;
  checker.check_file(path);
  return checker.complaints;
}

/// Every attribute that the standard requires, with an object that must have it.
const std::vector<std::pair<std::string, std::string>> required_attributes{
    {"/", "openPMD"},
    {"/", "openPMDextension"},
    {"/", "basePath"},
    {"/", "iterationEncoding"},
    {"/", "iterationFormat"},
    {"/", "meshesPath"},
    {"/data/20", "time"},
    {"/data/40", "dt"},
    {"/data/20", "timeUnitSI"},
    {"/data/20/meshes/volume_E", "geometry"},
    {"/data/20/meshes/volume_H", "dataOrder"},
    {"/data/40/meshes/volume_H", "axisLabels"},
    {"/data/20/meshes/plane_y_E", "gridSpacing"},
    {"/data/40/meshes/plane_y_E", "gridGlobalOffset"},
    {"/data/20/meshes/volume_E", "gridUnitSI"},
    {"/data/20/meshes/volume_E", "unitDimension"},
    {"/data/20/meshes/volume_H", "timeOffset"},
    {"/data/40/meshes/volume_H/y", "unitSI"},
    {"/data/40/meshes/plane_y_E/z", "position"},
};

template <class Work>
void with_object(const std::string& path, unsigned mode, const std::string& name, const Work& work) {
  const Closing file(H5Fopen(path.c_str(), mode, H5P_DEFAULT), H5Fclose);
  REQUIRE(file.id >= 0);
  const Closing object(H5Oopen(file.id, name.c_str(), H5P_DEFAULT), H5Oclose);
  CAPTURE(name);
  REQUIRE(object.id >= 0);
  work(object.id);
}

}  // namespace

TEST_CASE("A record has what openPMD 1.1.0 requires", "[record][standard]") {
  const TemporaryFolder folder;
  const std::string path = folder / "run.h5";
  write_small_record(path);
  CHECK(complaints_about(path) == std::vector<std::string>{});

  SECTION("and the check notices when one is missing") {
    for (const auto& [object, attribute] : required_attributes) {
      const std::string broken = folder / "broken.h5";
      std::filesystem::copy_file(path, broken, std::filesystem::copy_options::overwrite_existing);
      const char* name = attribute.c_str();
      with_object(broken, H5F_ACC_RDWR, object, [&](hid_t id) { REQUIRE(H5Adelete(id, name) >= 0); });
      CHECK(complaints_about(broken) == std::vector<std::string>{object + " lacks " + attribute});
    }
  }
}

TEST_CASE("Units, staggering and half steps are told in the standard's terms", "[record][standard]") {
  const TemporaryFolder folder;
  const std::string path = folder / "run.h5";
  write_small_record(path);
  const double dt_s = small_lattice().dt_s;
  with_object(path, H5F_ACC_RDONLY, "/data/40", [&](hid_t id) {
    CHECK(numbers(id, "time").front() == Approx(40 * dt_s).epsilon(1e-15));
    CHECK(numbers(id, "dt").front() == dt_s);
    CHECK(numbers(id, "timeUnitSI").front() == 1.0);
  });
  with_object(path, H5F_ACC_RDONLY, "/data/40/meshes/volume_E", [&](hid_t id) {
    CHECK(texts(id, "axisLabels") == std::vector<std::string>{"z", "y", "x"});
    CHECK(numbers(id, "timeOffset").front() == 0.0);
    CHECK(numbers(id, "unitDimension") == std::vector<double>{1, 1, -3, -1, 0, 0, 0});  // V/m
  });
  with_object(path, H5F_ACC_RDONLY, "/data/40/meshes/volume_H", [&](hid_t id) {
    CHECK(numbers(id, "timeOffset").front() == 0.5 * dt_s);
    CHECK(numbers(id, "unitDimension") == std::vector<double>{-1, 0, 0, 1, 0, 0, 0});  // A/m
  });
}

TEST_CASE("Every dataset carries unitSI, unitDimension and one line of description", "[record][standard]") {
  const TemporaryFolder folder;
  const std::string path = folder / "run.h5";
  write_small_record(path);
  struct Visit {
    int datasets = 0;
    std::vector<std::string> lacking;
  } visit;
  const Closing file(H5Fopen(path.c_str(), H5F_ACC_RDONLY, H5P_DEFAULT), H5Fclose);
  H5Ovisit(
      file.id, H5_INDEX_NAME, H5_ITER_INC,
      [](hid_t root, const char* name, const H5O_info_t* info, void* data) -> herr_t {
        if (info->type != H5O_TYPE_DATASET) return 0;
        auto& found = *static_cast<Visit*>(data);
        ++found.datasets;
        const Closing object(H5Oopen(root, name, H5P_DEFAULT), H5Oclose);
        if (H5Aexists(object.id, "unitSI") <= 0 || numbers(object.id, "unitSI").size() != 1 ||
            H5Aexists(object.id, "unitDimension") <= 0 || numbers(object.id, "unitDimension").size() != 7 ||
            H5Aexists(object.id, "description") <= 0 || texts(object.id, "description").front().empty() ||
            texts(object.id, "description").front().find('\n') != std::string::npos)
          found.lacking.emplace_back(name);
        return 0;
      },
      &visit);
  CHECK(visit.lacking == std::vector<std::string>{});
  // 2 steps x 8 components, 8 lists of 5, 4 of the scene, 3 of the mesh, 2 points of 8, 3 of the energy, 2 +
  // 6 of the audit.
  CHECK(visit.datasets == 16 + 40 + 4 + 3 + 16 + 3 + 8);
}

TEST_CASE("A snapshot lies in the file in the order z, y, x", "[record][standard]") {
  const TemporaryFolder folder;
  const std::string path = folder / "run.h5";
  const std::array<std::vector<double>, 3> points_m{
      {{0.0, 0.01}, {0.1, 0.12, 0.14}, {0.0, 0.05, 0.1, 0.15, 0.2}}};
  {
    RecordWriter writer(path, small_scene());
    writer.take(counted_snapshot("cut", 0, Component::hz, points_m, 1e-12));
    writer.finish(small_result(), small_provenance(), false);
  }
  const Closing file(H5Fopen(path.c_str(), H5F_ACC_RDONLY, H5P_DEFAULT), H5Fclose);
  const Closing dataset(H5Dopen2(file.id, "/data/0/meshes/cut_H/z", H5P_DEFAULT), H5Dclose);
  REQUIRE(dataset.id >= 0);
  const Closing space(H5Dget_space(dataset.id), H5Sclose);
  hsize_t extents[3] = {};
  REQUIRE(H5Sget_simple_extent_dims(space.id, extents, nullptr) == 3);
  CHECK(extents[0] == 5);
  CHECK(extents[1] == 3);
  CHECK(extents[2] == 2);
  double values[5][3][2];
  REQUIRE(H5Dread(dataset.id, H5T_NATIVE_DOUBLE, H5S_ALL, H5S_ALL, H5P_DEFAULT, values) >= 0);
  for (int k = 0; k < 5; ++k)
    for (int j = 0; j < 3; ++j)
      for (int i = 0; i < 2; ++i) CHECK(values[k][j][i] == 100 * i + 10 * j + k);
}

TEST_CASE("An audit plane lies in the file as compound of r and i", "[record][standard]") {
  const TemporaryFolder folder;
  const std::string path = folder / "run.h5";
  write_small_record(path);
  const Closing file(H5Fopen(path.c_str(), H5F_ACC_RDONLY, H5P_DEFAULT), H5Fclose);
  const Closing dataset(H5Dopen2(file.id, "/shell_audit/faces/z+/Ex_5", H5P_DEFAULT), H5Dclose);
  REQUIRE(dataset.id >= 0);
  const Closing type(H5Dget_type(dataset.id), H5Tclose);
  CHECK(H5Tget_size(type.id) == 16);
  const Closing imaginary(H5Tcreate(H5T_COMPOUND, sizeof(double)), H5Tclose);
  H5Tinsert(imaginary.id, "i", 0, H5T_NATIVE_DOUBLE);
  std::vector<double> values(3 * 4 * 3);
  REQUIRE(H5Dread(dataset.id, imaginary.id, H5S_ALL, H5S_ALL, H5P_DEFAULT, values.data()) >= 0);
  for (std::size_t n = 0; n < values.size(); ++n) CHECK(values[n] == -static_cast<int>(n) / 7.0);
}

TEST_CASE("The series of a point have times of their own for E and H", "[record][standard]") {
  const TemporaryFolder folder;
  const std::string path = folder / "run.h5";
  write_small_record(path);
  const double dt_s = small_lattice().dt_s;
  const Closing file(H5Fopen(path.c_str(), H5F_ACC_RDONLY, H5P_DEFAULT), H5Fclose);
  for (const double offset : {0.0, 0.5}) {
    const char* name = offset == 0.0 ? "/points/above_drum/time_E" : "/points/above_drum/time_H";
    const Closing dataset(H5Dopen2(file.id, name, H5P_DEFAULT), H5Dclose);
    REQUIRE(dataset.id >= 0);
    double times_s[7];
    REQUIRE(H5Dread(dataset.id, H5T_NATIVE_DOUBLE, H5S_ALL, H5S_ALL, H5P_DEFAULT, times_s) >= 0);
    for (int n = 0; n < 7; ++n) CHECK(times_s[n] == Approx((n + offset) * dt_s).epsilon(1e-14).margin(1e-30));
  }
}

TEST_CASE("Points recomputed from the standard's attributes are the snapshot's own", "[record][standard]") {
  const TemporaryFolder folder;
  const std::string path = folder / "run.h5";
  Scene scene = small_scene();
  const Lattice& lattice = scene.problem.lattice;
  const int stride = GENERATE(1, 2, 3, 8);  // 8 leaves a single position along x
  const bool is_plane = GENERATE(false, true);
  SnapshotRequest request;
  request.name = "cut";
  request.stride = stride;
  if (is_plane) request.normal = Axis::x;
  scene.problem.recording.snapshots = {request};
  {
    RecordWriter writer(path, scene);
    for (const Component c : all_components) {
      auto points_m = lattice_points(lattice, c, stride);
      if (is_plane) points_m[0] = {0.0175};
      writer.take(counted_snapshot("cut", 5, c, points_m, lattice.dt_s));
    }
    writer.finish(small_result(), small_provenance(), false);
  }
  for (const Component c : all_components) {
    CAPTURE(stride, is_plane, name_of(c));
    const std::string record = std::string("/data/5/meshes/cut_") + (is_electric(c) ? "E" : "H");
    std::vector<double> offset, spacing, position;
    with_object(path, H5F_ACC_RDONLY, record, [&](hid_t id) {
      CHECK(texts(id, "geometry").front() == "cartesian");
      offset = numbers(id, "gridGlobalOffset");
      spacing = numbers(id, "gridSpacing");
    });
    with_object(path, H5F_ACC_RDONLY, record + "/" + "xyz"[index_of(axis_of(c))],
                [&](hid_t id) { position = numbers(id, "position"); });
    auto points_m = lattice_points(lattice, c, stride);
    if (is_plane) points_m[0] = {0.0175};
    for (const Axis axis : all_axes) {
      const auto a = static_cast<std::size_t>(index_of(axis));
      const std::size_t from_slowest = 2 - a;
      const bool is_normal = is_plane && axis == Axis::x;
      const double wanted_spacing_m = (is_normal ? 1 : stride) * lattice.along(axis).cell_m(0);
      CHECK(spacing[from_slowest] == Approx(wanted_spacing_m).epsilon(1e-12));
      CHECK(position[from_slowest] >= 0.0);
      CHECK(position[from_slowest] < 1.0);
      for (std::size_t i = 0; i < points_m[a].size(); ++i)
        CHECK(offset[from_slowest] +
                  (static_cast<double>(i) + position[from_slowest]) * spacing[from_slowest] ==
              Approx(points_m[a][i]).margin(1e-12));
      if (stride == 1 && !is_normal)  // Yee's own staggering
        CHECK(position[from_slowest] == Approx(is_half(c, axis) ? 0.5 : 0.0).margin(1e-9));
    }
  }
}

TEST_CASE("Uneven points are told as such and kept exactly", "[record][standard]") {
  const TemporaryFolder folder;
  const std::string path = folder / "run.h5";
  std::array<std::vector<double>, 3> points_m{{{0.0, 0.01, 0.03}, {0.1}, {0.0, 0.05}}};
  {
    RecordWriter writer(path, small_scene());
    writer.take(counted_snapshot("cut", 5, Component::ex, points_m, 1e-12));
    writer.finish(small_result(), small_provenance(), false);
  }
  CHECK(complaints_about(path) == std::vector<std::string>{});
  with_object(path, H5F_ACC_RDONLY, "/data/5/meshes/cut_E",
              [&](hid_t id) { CHECK(texts(id, "geometry").front() == "other"); });
  const Record record(path);
  REQUIRE(record.snapshots.size() == 1);
  CHECK(record.snapshots[0].positions_m == points_m);
}
