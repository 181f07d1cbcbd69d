// A small scene, snapshots and results to write into records. All invented.
#pragma once

#include <unistd.h>

#include <complex>
#include <filesystem>
#include <string>
#include <vector>

#include "io/record.hpp"

namespace wanewall::test {

/// A folder that is removed with all that is in it.
class TemporaryFolder {
 public:
  TemporaryFolder() {
    std::string pattern = (std::filesystem::temp_directory_path() / "record-XXXXXX").string();
    path_ = ::mkdtemp(pattern.data());
  }
  ~TemporaryFolder() {
    std::error_code ignored;
    std::filesystem::remove_all(path_, ignored);
  }
  TemporaryFolder(const TemporaryFolder&) = delete;
  TemporaryFolder& operator=(const TemporaryFolder&) = delete;

  std::string operator/(const std::string& name) const { return (path_ / name).string(); }
  std::size_t n_files() const {
    std::size_t n = 0;
    for ([[maybe_unused]] const auto& entry : std::filesystem::directory_iterator(path_)) ++n;
    return n;
  }

 private:
  std::filesystem::path path_;
};

inline Lattice small_lattice() {
  Lattice lattice;
  lattice.lines = {MeshLines::uniform(-0.03, 0.01, 9), MeshLines::uniform(0.1, 0.02, 8),
                   MeshLines::uniform(-0.25, 0.05, 10)};
  lattice.shell_cells = {2, 2, 0, 0, 3, 1};
  lattice.periodic = {false, true, false};
  lattice.dt_s = 1.7e-11;
  return lattice;
}

inline Scene small_scene() {
  Scene scene;
  scene.file = "small.yaml";
  scene.title = "Two plates, 20 \xC2\xB0 apart";
  scene.text = "title: Two plates\n# \xC3\xA9t\xC3\xA9\nband: [0.4 GHz, 1.6 GHz]\n";
  scene.band_lo_hz = 0.4e9;
  scene.band_hi_hz = 1.6e9;
  scene.used = {
      {"mesh.cell", "10 mm", false}, {"shell.every_face.cells", "10", true}, {"stop.at", "60 ns", false}};
  scene.problem.lattice = small_lattice();
  scene.problem.precision = Precision::double_precision;
  const std::array<FaceKind, 6> kinds{FaceKind::cfs_pml,  FaceKind::matched_slab,  FaceKind::periodic,
                                      FaceKind::periodic, FaceKind::electric_wall, FaceKind::magnetic_wall};
  for (std::size_t n = 0; n < kinds.size(); ++n) scene.problem.faces[n].kind = kinds[n];
  return scene;
}

/// A component's own positions in the closed clear volume, every stride-th of them.
inline std::array<std::vector<double>, 3> lattice_points(const Lattice& lattice, Component c, int stride) {
  std::array<std::vector<double>, 3> points_m;
  for (const Axis axis : all_axes) {
    const IndexRange range = lattice.clear(c, axis);
    for (int i = range.begin; i < range.end; i += stride)
      points_m[static_cast<std::size_t>(index_of(axis))].push_back(lattice.position_m(c, axis, i));
  }
  return points_m;
}

/// Values 100 i + 10 j + k + step / 1000, in double precision.
inline Snapshot counted_snapshot(const std::string& name, long step, Component c,
                                 const std::array<std::vector<double>, 3>& points_m, double dt_s) {
  std::vector<double> values;
  for (std::size_t i = 0; i < points_m[0].size(); ++i)
    for (std::size_t j = 0; j < points_m[1].size(); ++j)
      for (std::size_t k = 0; k < points_m[2].size(); ++k)
        values.push_back(static_cast<double>(100 * i + 10 * j + k) + static_cast<double>(step) / 1000.0);
  return {name, step,     is_electric(c) ? time_of_e_s(step, dt_s) : time_of_h_s(step, dt_s),
          c,    points_m, values};
}

inline RunResult small_result() {
  RunResult result;
  result.steps = 7;
  result.reason = StopReason::energy_fell;
  result.not_finite_where = "";
  result.threads = 3;
  result.vector_code = "AVX2";
  result.build_seconds = 0.25;
  result.march_seconds = 12.5;
  for (const char* name : {"z last first", "above_drum"}) {
    PointSeries point{name, {0.01, -0.02, 0.3}, {}};
    for (std::size_t c = 0; c < 6; ++c)
      for (int n = 0; n < 7; ++n) point.values[c].push_back(1.0 / 3.0 + static_cast<double>(c) - 0.1 * n);
    result.points.push_back(point);
  }
  result.energy = {{0, 50, 100}, {0.0, 1.5e-12, 3.25e-13}};
  result.audit.frequencies_hz = {0.4e9, 1.0e9, 1.6e9};
  result.audit.sample_every = 4;
  result.audit.incident_v_s_per_m = {{1e-9, 2e-9}, {-3e-10, 0.5e-10}, {1.0 / 3.0, 0.0}};
  result.audit.incident_direction = {0.0, 0.6, -0.8};
  result.audit.incident_impedance_ohm = 376.7;
  for (const Side side : {Side::z_hi, Side::x_lo}) {
    AuditFace face;
    face.side = side;
    face.is_uniform = side == Side::z_hi;
    face.is_layered = side == Side::x_lo;
    face.permittivity_rel = 4.5;
    face.permeability_rel = 1.25;
    face.conductivity_s_per_m = 2e-3;
    for (const Component c : {Component::hy, Component::ex, Component::ey}) {
      AuditPlane plane{c, 5 + index_of(c), 0.125, {4, 3}, {}};
      for (int n = 0; n < 3 * 4 * 3; ++n) plane.sums.emplace_back(0.1 * n, -n / 7.0);
      face.planes.push_back(plane);
    }
    result.audit.faces.push_back(face);
  }
  return result;
}

inline Provenance small_provenance() {
  return {"0.1.0",
          "Release",
          "some compiler 12",
          "some processor",
          "some system",
          "2030-01-02 03:04:05 +0000",
          "2030-01-02 04:04:05 +0000",
          3,
          "AVX2",
          "fused"};
}

/// A record with an E plane in single precision and an E and H volume of every second position.
inline void write_small_record(const std::string& path, bool xdmf = false) {
  const Scene scene = small_scene();
  const double dt_s = scene.problem.lattice.dt_s;
  RecordWriter writer(path, scene);
  for (const long step : {20L, 40L}) {
    for (const Component c : {Component::ex, Component::ez}) {
      auto points_m = lattice_points(scene.problem.lattice, c, 1);
      points_m[1] = {0.13};  // a plane across y, between the lattice's own layers
      Snapshot plane = counted_snapshot("plane y", step, c, points_m, dt_s);
      const auto& values = std::get<std::vector<double>>(plane.values);
      plane.values = std::vector<float>(values.begin(), values.end());
      writer.take(plane);
    }
    for (const Component c : all_components)
      writer.take(counted_snapshot("volume", step, c, lattice_points(scene.problem.lattice, c, 2), dt_s));
  }
  writer.finish(small_result(), small_provenance(), xdmf);
}

}  // namespace wanewall::test
