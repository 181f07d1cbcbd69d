#include "postproc/witness_tables.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <string>

namespace wanewall {
namespace {

double part_of(double level_db) {
  return std::pow(10.0, level_db / 20.0);
}

/// "-83.1", or "< -150.0 (floor)" for what the witness cannot see.
Cell change_cell(double db, double floor_db) {
  if (db < floor_db) return fmt::format("< {:.1f} (floor)", floor_db);
  if (std::isfinite(db)) return fmt::format("{:.1f}", db);
  return std::string("no level");
}

/// A change, but no less than the floor.
double bar_of(double change, double reference, double floor_db) {
  return std::max(change, reference * part_of(floor_db));
}

}  // namespace

double error_bar(const FieldError& error, double floor_db) {
  return bar_of(error.largest_change, error.reference_peak, floor_db);
}

Table witness_point_table(const Comparison& comparison, double floor_db) {
  Table table;
  table.columns = {{"point", ""}, {"field", ""},           {"peak", ""}, {"error bar", ""},
                   {"unit", ""},  {"shell changed", "dB"}, {"at", "ns"}, {"worst in band", "dB"}};
  for (const PointError& point : comparison.points) {
    for (const bool electric : {true, false}) {
      const FieldError& error = electric ? point.e : point.h;
      table.rows.push_back({point.name, electric ? "E" : "H", error.reference_peak,
                            error_bar(error, floor_db), electric ? "V/m" : "A/m",
                            change_cell(error.peak_db, floor_db), error.largest_at_s * 1e9,
                            change_cell(worst_in_band_db(error), floor_db)});
    }
  }
  return table;
}

Table witness_face_table(const Comparison& comparison, double floor_db) {
  Table table;
  table.columns = {{"face", ""},        {"frequency", "GHz"},
                   {"E changed", "dB"}, {"error bar of E", "V s/m"},
                   {"H changed", "dB"}, {"error bar of H", "A s/m"}};
  for (const FaceError& face : comparison.faces)
    for (std::size_t f = 0; f < face.frequencies_hz.size(); ++f)
      table.rows.push_back({std::string(name_of(face.side)), face.frequencies_hz[f] * 1e-9,
                            change_cell(face.e_db[f], floor_db),
                            bar_of(face.e_change_v_s_per_m[f], face.e_reference_v_s_per_m[f], floor_db),
                            change_cell(face.h_db[f], floor_db),
                            bar_of(face.h_change_a_s_per_m[f], face.h_reference_a_s_per_m[f], floor_db)});
  return table;
}

}  // namespace wanewall
