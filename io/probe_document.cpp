#include "io/probe_document.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <limits>

#include "io/quantity.hpp"
#include "postproc/near_field_tables.hpp"

namespace wanewall {
namespace {

std::string length_text(double m) {
  return format_quantity(m, Family::length, 7);
}
std::string frequency_text(double hz) {
  return format_quantity(hz, Family::frequency, 4);
}

std::string one_line(std::string text) {
  std::replace_if(
      text.begin(), text.end(), [](char c) { return c == '\n' || c == '\r'; }, ' ');
  return text;
}

std::string heading_of(const Record& record, const std::string& record_path, const std::string& what) {
  const Provenance& by = record.provenance;
  return fmt::format(
      "# {}\n\n- record {}: {}\n- band {} to {}; step {}, Courant number {:.4f}, {} precision\n"
      "- computed by wanewall {} ({}), {}; probed by wanewall {}\n",
      what, record_path, one_line(record.title), frequency_text(record.band_lo_hz),
      frequency_text(record.band_hi_hz), format_quantity(record.lattice.dt_s, Family::time, 5),
      record.lattice.courant_number(), record.precision == Precision::single_precision ? "single" : "double",
      by.program_version, by.build_type, by.ended_utc, WANEWALL_VERSION);
}

std::string sampling_text(const Record& record, const ProbedPoint& point) {
  const double limit_hz = nyquist_limit_hz(point.series);
  if (!(limit_hz > 0.0)) return "- one recorded step only: no spectrum\n";
  const double spacing_s = 0.5 / limit_hz;
  std::string text = fmt::format("- a sample every {} ({:.4g} steps); Nyquist limit {}\n",
                                 format_quantity(spacing_s, Family::time, 5), spacing_s / record.lattice.dt_s,
                                 frequency_text(limit_hz));
  if (record.band_hi_hz >= limit_hz)
    text += fmt::format(
        "- CAUTION: the band reaches {}, past the Nyquist limit: what the field holds above the limit is "
        "folded below "
        "it.\n  Record more often to see it\n",
        frequency_text(record.band_hi_hz));
  return text;
}

std::string missing_text(const std::vector<Component>& missing) {
  if (missing.empty()) return "";
  std::string names;
  for (const Component c : missing) names += (names.empty() ? "" : ", ") + std::string(name_of(c));
  return fmt::format("- not around this point: {} (each component was recorded on its own points)\n", names);
}

bool any_on_plane(const std::vector<FieldSeries>& series) {
  return std::any_of(series.begin(), series.end(), [](const FieldSeries& one) {
    return std::find(one.degree.begin(), one.degree.end(), 0) != one.degree.end();
  });
}

}  // namespace

double nyquist_limit_hz(const std::vector<FieldSeries>& series) {
  double limit_hz = std::numeric_limits<double>::infinity();
  for (const FieldSeries& one : series)
    limit_hz = std::min(limit_hz, one.times_s.size() < 2 ? 0.0 : 0.5 / sample_spacing_s(one));
  return limit_hz;
}

Table probe_table(const ProbedPoint& point, const std::vector<double>& frequencies_hz) {
  return frequencies_hz.empty() ? probe_series_table(point.series)
                                : probe_spectrum_table(point.series, frequencies_hz);
}

std::string probe_markdown(const Record& record, const std::string& record_path, const ProbedPoint& point,
                           const std::vector<double>& frequencies_hz) {
  std::string text =
      heading_of(record, record_path,
                 fmt::format("Field at x = {}, y = {}, z = {}", length_text(point.position_m[0]),
                             length_text(point.position_m[1]), length_text(point.position_m[2])));
  text +=
      fmt::format("- from {}\n", point.source) + sampling_text(record, point) + missing_text(point.missing);
  text += "\n## Interpolation, each component from its own points\n\n";
  text += to_markdown(interpolation_table(point.series));
  text += "\nLinear: error of second order in the spacing of the recorded points. Cubic: of fourth order.\n";
  if (any_on_plane(point.series))
    text += "On the plane: interpolated linearly between the two nearest layers when it was recorded.\n";
  text += "\n## Peaks\n\n" + to_markdown(probe_peak_table(point.series));
  if (frequencies_hz.empty()) {
    text += "\n## Series\n\n";
  } else {
    text +=
        "\n## Spectrum\n\nF = T sum f(t) exp(-j 2 pi f t), T the time between samples, t the component's own "
        "times.\n\n";
  }
  return text + to_markdown(probe_table(point, frequencies_hz));
}

std::string box_text(const Extent& extent) {
  std::string text;
  for (const Axis axis : all_axes) {
    const auto a = static_cast<std::size_t>(index_of(axis));
    text += fmt::format("{}{} = {}", text.empty() ? "" : ", ", name_of(axis), length_text(extent.lo_m[a]));
    if (extent.hi_m[a] != extent.lo_m[a]) text += " to " + length_text(extent.hi_m[a]);
  }
  return text;
}

std::string probe_list_markdown(const Record& record, const std::string& record_path,
                                const std::vector<RecordedSnapshot>& snapshots) {
  std::string text = heading_of(record, record_path, "What can be probed") + "\n## Snapshots\n\n";
  Table boxes;
  boxes.columns = {{"name", ""},    {"fields", ""},          {"x from", "m"},
                   {"x to", "m"},   {"y from", "m"},         {"y to", "m"},
                   {"z from", "m"}, {"z to", "m"},           {"samples", "", NumberStyle::whole},
                   {"every", "ns"}, {"Nyquist limit", "GHz"}};
  for (const RecordedSnapshot& snapshot : snapshots) {
    std::string fields;
    std::vector<FieldSeries> sampling;
    for (const RecordedField& field : snapshot.fields) {
      fields += (fields.empty() ? "" : " ") + std::string(name_of(field.component));
      sampling.push_back({field.component, {}, field.steps, field.times_s, {}});
    }
    const Extent box = common_extent(snapshot.fields);
    std::vector<Cell> row{snapshot.name, fields};
    for (std::size_t a = 0; a < 3; ++a) {
      row.emplace_back(box.lo_m[a]);
      row.emplace_back(box.hi_m[a]);
    }
    row.emplace_back(static_cast<double>(snapshot.fields.front().times_s.size()));
    const double limit_hz = nyquist_limit_hz(sampling);
    row.emplace_back(limit_hz > 0.0 ? Cell{0.5e9 / limit_hz} : Cell{});
    row.emplace_back(limit_hz > 0.0 ? Cell{limit_hz * 1e-9} : Cell{});
    boxes.rows.push_back(std::move(row));
  }
  text += snapshots.empty() ? "None.\n" : to_markdown(boxes);
  text += "\n## Points\n\n";
  Table points;
  points.columns = {{"name", ""}, {"x", "m"}, {"y", "m"}, {"z", "m"}, {"samples", "", NumberStyle::whole}};
  for (const PointSeries& point : record.result.points)
    points.rows.push_back({point.name, point.position_m[0], point.position_m[1], point.position_m[2],
                           static_cast<double>(point.values[0].size())});
  return text + (points.rows.empty() ? "None.\n" : to_markdown(points));
}

}  // namespace wanewall
