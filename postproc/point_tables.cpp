#include "postproc/point_tables.hpp"

#include <cmath>
#include <string>

#include "geometry/constants.hpp"

namespace wanewall {
namespace {

const std::vector<double>& samples_of(const PointSeries& point, Component c) {
  return point.values[static_cast<std::size_t>(index_of(c))];
}

double time_of(Component c, std::size_t step, double dt_s) {
  const auto n = static_cast<long>(step);
  return is_electric(c) ? time_of_e_s(n, dt_s) : time_of_h_s(n, dt_s);
}

std::string field_unit(Component c) {
  return is_electric(c) ? "V/m" : "A/m";
}
std::string spectrum_unit(Component c) {
  return is_electric(c) ? "V s/m" : "A s/m";
}

}  // namespace

Peak peak_of(const PointSeries& point, Component component, double dt_s) {
  const std::vector<double>& samples = samples_of(point, component);
  Peak peak;
  for (std::size_t n = 0; n < samples.size(); ++n) {
    if (std::isfinite(samples[n]) && std::abs(samples[n]) > std::abs(peak.value))
      peak = {samples[n], time_of(component, n, dt_s)};
  }
  return peak;
}

std::complex<double> spectrum_at(const PointSeries& point, Component component, double dt_s,
                                 double frequency_hz) {
  const std::vector<double>& samples = samples_of(point, component);
  const double omega = 2.0 * pi * frequency_hz;
  std::complex<double> sum = 0.0;
  for (std::size_t n = 0; n < samples.size(); ++n)
    sum += std::polar(dt_s * samples[n], -omega * time_of(component, n, dt_s));
  return sum;
}

Table peak_table(const std::vector<PointSeries>& points, double dt_s) {
  Table table;
  table.columns = {{"point", ""}, {"x", "m"},   {"y", "m"},   {"z", "m"},
                   {"field", ""}, {"peak", ""}, {"unit", ""}, {"at", "ns"}};
  for (const PointSeries& point : points) {
    for (Component c : all_components) {
      const Peak peak = peak_of(point, c, dt_s);
      table.rows.push_back({point.name, point.position_m[0], point.position_m[1], point.position_m[2],
                            std::string(name_of(c)), peak.value, field_unit(c), peak.time_s * 1e9});
    }
  }
  return table;
}

Table spectrum_rows(const std::vector<PointSeries>& points, double dt_s,
                    const std::vector<double>& frequencies_hz) {
  Table table;
  table.columns = {{"point", ""},       {"x", "m"},        {"y", "m"},   {"z", "m"},      {"field", ""},
                   {"frequency", "Hz"}, {"magnitude", ""}, {"unit", ""}, {"phase", "deg"}};
  for (const PointSeries& point : points) {
    for (Component c : all_components) {
      for (double frequency_hz : frequencies_hz) {
        const std::complex<double> value = spectrum_at(point, c, dt_s, frequency_hz);
        table.rows.push_back({point.name, point.position_m[0], point.position_m[1], point.position_m[2],
                              std::string(name_of(c)), frequency_hz, std::abs(value), spectrum_unit(c),
                              std::arg(value) * 180.0 / pi});
      }
    }
  }
  return table;
}

Table spectrum_table(const PointSeries& point, double dt_s, const std::vector<double>& frequencies_hz) {
  Table table;
  table.columns = {{"frequency", "GHz"}};
  for (Component c : all_components) table.columns.push_back({std::string(name_of(c)), spectrum_unit(c)});
  for (double frequency_hz : frequencies_hz) {
    std::vector<Cell> row{frequency_hz * 1e-9};
    for (Component c : all_components) row.emplace_back(std::abs(spectrum_at(point, c, dt_s, frequency_hz)));
    table.rows.push_back(std::move(row));
  }
  return table;
}

}  // namespace wanewall
