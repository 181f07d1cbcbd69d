// The texts of `wanewall probe`.
#pragma once

#include <string>
#include <vector>

#include "io/record.hpp"
#include "io/recorded_snapshots.hpp"
#include "postproc/near_field.hpp"
#include "postproc/table_text.hpp"

namespace wanewall {

/// What is known about the field at one point.
struct ProbedPoint {
  Vec3 position_m{};
  std::string source;               ///< "snapshot \"cut\"" or "point \"above_drum\""
  std::vector<FieldSeries> series;  ///< at least one, each with at least one sample
  std::vector<Component> missing;   ///< recorded, but not around this point
};

/// Half the sampling rate of the most sparsely sampled component [Hz]; zero with a single sample.
double nyquist_limit_hz(const std::vector<FieldSeries>& series);

/// The series, or with frequencies the spectrum: what the CSV file holds.
Table probe_table(const ProbedPoint& point, const std::vector<double>& frequencies_hz);

std::string probe_markdown(const Record& record, const std::string& record_path, const ProbedPoint& point,
                           const std::vector<double>& frequencies_hz);

/// What can be probed: all snapshots and points of a record.
std::string probe_list_markdown(const Record& record, const std::string& record_path,
                                const std::vector<RecordedSnapshot>& snapshots);

/// "x = 1 mm to 2 mm, y = 0 m, z = ..." for messages.
std::string box_text(const Extent& extent);

}  // namespace wanewall
