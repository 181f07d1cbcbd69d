// The snapshots of a record as the near-field probe wants them.
#pragma once

#include <string>
#include <vector>

#include "io/record.hpp"
#include "postproc/near_field.hpp"

namespace wanewall {

/// All components that were recorded under one name.
struct RecordedSnapshot {
  std::string name;
  std::vector<RecordedField> fields;
};

/// In the order of the record. The record must outlive the result; its values are read from the file when
/// they are asked for, and that may throw FileError.
std::vector<RecordedSnapshot> recorded_snapshots(const Record& record);

/// The snapshot in which most components can be interpolated at a point; among equals the one with the
/// densest points, then the first. Null when the point lies outside all of them.
const RecordedSnapshot* best_snapshot_at(const std::vector<RecordedSnapshot>& snapshots, const Vec3& point_m);

/// A recorded point's series, component by component.
std::vector<FieldSeries> series_of(const PointSeries& point, double dt_s);

}  // namespace wanewall
