#include "io/recorded_snapshots.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

namespace wanewall {
namespace {

/// Geometric mean of a component's spacings; zero for a lone point.
double mean_spacing_m(const RecordedField& field) {
  double log_sum = 0.0;
  int axes = 0;
  for (const std::vector<double>& points_m : field.positions_m) {
    if (points_m.size() < 2) continue;
    log_sum += std::log((points_m.back() - points_m.front()) / static_cast<double>(points_m.size() - 1));
    ++axes;
  }
  return axes == 0 ? 0.0 : std::exp(log_sum / axes);
}

}  // namespace

std::vector<RecordedSnapshot> recorded_snapshots(const Record& record) {
  std::vector<RecordedSnapshot> snapshots;
  for (std::size_t n = 0; n < record.snapshots.size(); ++n) {
    const SnapshotList& list = record.snapshots[n];
    auto snapshot = std::find_if(snapshots.begin(), snapshots.end(),
                                 [&](const RecordedSnapshot& s) { return s.name == list.name; });
    if (snapshot == snapshots.end()) snapshot = snapshots.insert(snapshot, {list.name, {}});
    RecordedField field;
    field.component = list.component;
    field.positions_m = list.positions_m;
    field.steps = list.steps;
    field.times_s = list.times_s;
    field.load = [&record, n](std::size_t which, const Index3& begin, const Index3& end) {
      return record.load_part(record.snapshots[n], which, begin, end);
    };
    snapshot->fields.push_back(std::move(field));
  }
  return snapshots;
}

const RecordedSnapshot* best_snapshot_at(const std::vector<RecordedSnapshot>& snapshots,
                                         const Vec3& point_m) {
  const RecordedSnapshot* best = nullptr;
  int most = 0;
  double densest_m = std::numeric_limits<double>::infinity();
  for (const RecordedSnapshot& snapshot : snapshots) {
    int n = 0;
    double spacing_m = 0.0;
    for (const RecordedField& field : snapshot.fields) {
      if (!stencil_at(field, point_m, Interpolation::linear)) continue;
      ++n;
      spacing_m = std::max(spacing_m, mean_spacing_m(field));
    }
    if (n > most || (n == most && n > 0 && spacing_m < densest_m)) {
      best = &snapshot;
      most = n;
      densest_m = spacing_m;
    }
  }
  return best;
}

std::vector<FieldSeries> series_of(const PointSeries& point, double dt_s) {
  std::vector<FieldSeries> all;
  for (const Component c : all_components) {
    FieldSeries series;
    series.component = c;
    series.degree = {1, 1, 1};  // the recorder interpolates linearly
    series.values = point.values[static_cast<std::size_t>(index_of(c))];
    for (std::size_t n = 0; n < series.values.size(); ++n) {
      const auto step = static_cast<long>(n);
      series.steps.push_back(step);
      series.times_s.push_back(is_electric(c) ? time_of_e_s(step, dt_s) : time_of_h_s(step, dt_s));
    }
    all.push_back(std::move(series));
  }
  return all;
}

}  // namespace wanewall
