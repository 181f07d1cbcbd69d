// Snapshots as openPMD 1.1.0 mesh records.
#pragma once

#include <optional>
#include <string>
#include <vector>

#include "io/hdf5.hpp"
#include "io/record.hpp"
#include "solver/results.hpp"

namespace wanewall {

/// How the points of one mesh record lie, in the terms of openPMD. All in the order x, y, z.
struct MeshGrid {
  /// False when some component's points are not evenly spaced; the standard then wants the geometry "other",
  /// and only the coordinate lists tell where the points are.
  bool is_cartesian = true;
  Vec3 spacing_m{};
  Vec3 offset_m{};
  /// Of each component that was asked for, in units of the spacing, in [0, 1): point i of axis a lies at
  /// offset[a] + (i + position[a]) spacing[a].
  std::vector<Vec3> positions;
};

/// `components` are the coordinate lists of a record's components, at least one. `fallback_spacing_m` is used
/// along axes on which no component has two points.
MeshGrid mesh_grid_of(const std::vector<std::array<std::vector<double>, 3>>& components,
                      const Vec3& fallback_spacing_m);

/// Writes snapshots into a record and remembers what they were.
class MeshRecordWriter {
 public:
  MeshRecordWriter(hdf5::File& file, const Lattice& lattice, std::vector<SnapshotRequest> requests);

  void take(const Snapshot& snapshot);
  /// Writes what openPMD wants to know about each record, and /snapshots.
  void finish();

  bool empty() const { return lists_.empty(); }
  const std::vector<SnapshotList>& lists() const { return lists_; }
  bool is_single(std::size_t list) const { return is_single_[list]; }

 private:
  std::size_t list_of(const Snapshot& snapshot);
  hdf5::Group meshes_of(long step);
  Vec3 fallback_spacing_m(const SnapshotList& list) const;
  void finish_record(const std::string& record);

  hdf5::File& file_;
  const Lattice& lattice_;
  std::vector<SnapshotRequest> requests_;
  std::vector<SnapshotList> lists_;
  std::vector<bool> is_single_;
};

}  // namespace wanewall
