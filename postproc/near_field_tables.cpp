#include "postproc/near_field_tables.hpp"

#include <cmath>
#include <map>
#include <stdexcept>

#include "geometry/constants.hpp"

namespace wanewall {
namespace {

std::string field_unit(Component c) {
  return is_electric(c) ? "V/m" : "A/m";
}
std::string spectrum_unit(Component c) {
  return is_electric(c) ? "V s/m" : "A s/m";
}

/// The first series of E, or of H; null when there is none.
const FieldSeries* first_of(const std::vector<FieldSeries>& series, bool electric) {
  for (const FieldSeries& one : series)
    if (is_electric(one.component) == electric) return &one;
  return nullptr;
}

}  // namespace

std::string interpolation_text(int degree) {
  switch (degree) {
    case 0:
      return "on the plane";
    case 1:
      return "linear";
    case 3:
      return "cubic";
    default:
      return "degree " + std::to_string(degree);
  }
}

Table interpolation_table(const std::vector<FieldSeries>& series) {
  Table table;
  table.columns = {{"field", ""}, {"along x", ""}, {"along y", ""}, {"along z", ""}};
  for (const FieldSeries& one : series)
    table.rows.push_back({std::string(name_of(one.component)), interpolation_text(one.degree[0]),
                          interpolation_text(one.degree[1]), interpolation_text(one.degree[2])});
  return table;
}

Table probe_peak_table(const std::vector<FieldSeries>& series) {
  Table table;
  table.columns = {{"field", ""},
                   {"peak", ""},
                   {"unit", ""},
                   {"at", "ns"},
                   {"last over peak", "dB", NumberStyle::one_decimal}};
  for (const FieldSeries& one : series) {
    std::size_t peak = 0;
    for (std::size_t n = 0; n < one.values.size(); ++n)
      if (std::abs(one.values[n]) > std::abs(one.values[peak])) peak = n;
    std::vector<Cell> row{std::string(name_of(one.component)), {}, field_unit(one.component), {}, {}};
    if (!one.values.empty()) {
      row[1] = one.values[peak];
      row[3] = one.times_s[peak] * 1e9;
      row[4] = 20.0 * std::log10(std::abs(one.values.back() / one.values[peak]));
    }
    table.rows.push_back(std::move(row));
  }
  return table;
}

Table probe_series_table(const std::vector<FieldSeries>& series) {
  Table table;
  table.columns = {{"step", "", NumberStyle::whole}};
  std::map<long, std::vector<Cell>> rows;
  std::size_t n_columns = 1;
  for (const bool electric : {true, false}) {
    const FieldSeries* first = first_of(series, electric);
    if (first == nullptr) continue;
    const auto add = [&](const std::vector<double>& values, double factor) {
      for (std::size_t n = 0; n < first->steps.size(); ++n) {
        std::vector<Cell>& row = rows[first->steps[n]];
        row.resize(n_columns + 1);
        row[0] = static_cast<double>(first->steps[n]);
        row[n_columns] = values[n] * factor;
      }
      ++n_columns;
    };
    table.columns.push_back({electric ? "time of E" : "time of H", "ns"});
    add(first->times_s, 1e9);
    for (const FieldSeries& one : series) {
      if (is_electric(one.component) != electric) continue;
      if (one.steps != first->steps)
        throw std::invalid_argument("components of one snapshot were recorded at different steps");
      table.columns.push_back({std::string(name_of(one.component)), field_unit(one.component)});
      add(one.values, 1.0);
    }
  }
  for (auto& [step, row] : rows) {
    row.resize(n_columns);
    table.rows.push_back(std::move(row));
  }
  return table;
}

Table probe_spectrum_table(const std::vector<FieldSeries>& series,
                           const std::vector<double>& frequencies_hz) {
  Table table;
  table.columns = {{"frequency", "GHz"}};
  for (const FieldSeries& one : series) {
    const std::string name(name_of(one.component));
    table.columns.push_back({"magnitude of " + name, spectrum_unit(one.component)});
    table.columns.push_back({"phase of " + name, "deg", NumberStyle::one_decimal});
  }
  for (const double frequency_hz : frequencies_hz) {
    std::vector<Cell> row{frequency_hz * 1e-9};
    for (const FieldSeries& one : series) {
      const std::complex<double> value = spectrum_at(one, frequency_hz);
      row.emplace_back(std::abs(value));
      row.emplace_back(std::arg(value) * 180.0 / pi);
    }
    table.rows.push_back(std::move(row));
  }
  return table;
}

}  // namespace wanewall
