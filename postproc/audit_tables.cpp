#include "postproc/audit_tables.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "postproc/face_split.hpp"

namespace wanewall {
namespace {

const Column face_column{"face", "", NumberStyle::whole};

std::string name_of(Polarisation p) {
  return p == Polarisation::te ? "TE" : "TM";
}

std::string name_of(Reflection::Kind kind) {
  switch (kind) {
    case Reflection::Kind::value:
      return "value";
    case Reflection::Kind::bound:
      return "bound";
    case Reflection::Kind::no_reading:
      break;
  }
  return "no reading";
}

Cell text(std::string_view t) {
  return std::string(t);
}
Cell number(const std::optional<double>& value) {
  return value ? Cell{*value} : Cell{};
}

Cell level_db(double power, const std::optional<double>& reference) {
  if (!reference || !(*reference > 0.0) || !(power > 0.0)) return {};
  return 10.0 * std::log10(power / *reference);
}

std::optional<double> clear_net(const FaceReading& reading) {
  if (!reading.net) return std::nullopt;
  return reading.net->clear_w_s2;
}

// Net power has a sign; its level relative to the incident power has none, so inward power is told in words.
Cell net_level(const FaceReading& reading) {
  const std::optional<double> net = clear_net(reading);
  if (!net) return {};
  if (*net < 0.0 && reading.incident_w_s2)
    return fmt::format("{:.1f} inwards", 10.0 * std::log10(-*net / *reading.incident_w_s2));
  return level_db(*net, reading.incident_w_s2);
}

bool has_incident(const FaceReport& face) {
  for (const FaceReading& reading : face.readings)
    if (reading.incident_w_s2) return true;
  return false;
}

std::string notes_of(const AngleRow& row) {
  const bool te = row.readings[0].not_illuminated, tm = row.readings[1].not_illuminated;
  std::string notes;
  if (te || tm) notes = te && tm ? "not illuminated" : te ? "TE not illuminated" : "TM not illuminated";
  if (row.walk_off) notes += notes.empty() ? "walk-off" : "; walk-off";
  return notes;
}

std::string sum_text(const AngleSum& sum) {
  return sum.not_illuminated ? "not illuminated" : reflection_text(sum.reflection);
}

Cell floor_of(const AngleSum& sum) {
  return sum.outgoing_w_s2 > 0.0 ? Cell{sum.reflection.floor_db} : Cell{};
}

bool is_empty(const AngleRow& row) {
  return row.readings[0].waves == 0;
}

}  // namespace

std::string reflection_text(const Reflection& reflection) {
  switch (reflection.kind) {
    case Reflection::Kind::value:
      if (!std::isfinite(reflection.value_db)) return "-";
      return fmt::format("{:.1f}", reflection.value_db);
    case Reflection::Kind::bound:
      return fmt::format("< {:.1f} (floor)", reflection.high_db);
    case Reflection::Kind::no_reading:
      break;
  }
  return "no reading";
}

Table overview_table(const AuditReport& report) {
  Table table;
  table.columns = {face_column, {"shell", "cells", NumberStyle::whole}};
  for (const char* range : {"worst R to 40 deg", "worst R, all angles"}) {
    table.columns.push_back({range, "dB"});
    table.columns.push_back({"floor", "dB", NumberStyle::one_decimal});
    table.columns.push_back({"at", "GHz"});
  }
  table.columns.push_back({"remark", ""});
  for (const FaceReport& face : report.faces) {
    std::vector<Cell> row{text(name_of(face.side)), double(face.shell_cells)};
    for (AngleRange range : {AngleRange::near_normal, AngleRange::all}) {
      if (const FaceReading* worst = worst_reading(face, range)) {
        const Reflection& r = sum_over(*worst, range).reflection;
        row.insert(row.end(), {reflection_text(r), r.floor_db, worst->frequency_hz * 1e-9});
      } else {
        row.resize(row.size() + 3);
      }
    }
    row.push_back(!face.not_split_because.empty() ? text("net power only: " + face.not_split_because)
                  : worst_reading(face, AngleRange::all) == nullptr ? text("nothing outgoing")
                                                                    : text(""));
    table.rows.push_back(std::move(row));
  }
  return table;
}

Table power_table(const FaceReport& face) {
  const bool is_split = face.not_split_because.empty();
  const bool with_incident = has_incident(face);
  Table table;
  table.columns = {{"frequency", "GHz"}};
  if (is_split)
    for (const char* name : {"outgoing", "returned"}) table.columns.push_back({name, "W s^2"});
  table.columns.push_back({"net", "W s^2"});
  if (is_split) {
    table.columns.push_back({"R to 40 deg", "dB"});
    table.columns.push_back({"floor", "dB", NumberStyle::one_decimal});
    for (const char* name : {"R, all angles", "R of TE", "R of TM"}) table.columns.push_back({name, "dB"});
    table.columns.push_back({"floor, all angles", "dB", NumberStyle::one_decimal});
    if (with_incident) table.columns.push_back({"outgoing / incident", "dB", NumberStyle::one_decimal});
  }
  if (with_incident) table.columns.push_back({"net / incident", "dB", NumberStyle::one_decimal});

  for (const FaceReading& reading : face.readings) {
    std::vector<Cell> row{reading.frequency_hz * 1e-9};
    if (is_split) row.insert(row.end(), {reading.total.outgoing_w_s2, reading.total.returned_w_s2});
    row.push_back(number(clear_net(reading)));
    if (is_split) {
      row.insert(row.end(),
                 {sum_text(reading.near_normal), floor_of(reading.near_normal),
                  reflection_text(reading.total.reflection), reflection_text(reading.by_polarisation[0]),
                  reflection_text(reading.by_polarisation[1]), floor_of(reading.total)});
      if (with_incident) row.push_back(level_db(reading.total.outgoing_w_s2, reading.incident_w_s2));
    }
    if (with_incident) row.push_back(net_level(reading));
    table.rows.push_back(std::move(row));
  }
  return table;
}

bool has_angles(const FaceReport& face) {
  for (const FaceReading& reading : face.readings)
    if (std::count_if(reading.rows.begin(), reading.rows.end(),
                      [](const AngleRow& row) { return !is_empty(row); }) > 1)
      return true;
  return false;
}

Table angle_table(const FaceReading& reading) {
  Table table;
  table.columns = {{"incidence", "deg"}};
  for (const char* pol : {"TE ", "TM "}) {
    table.columns.push_back({std::string(pol) + "share", "dB", NumberStyle::one_decimal});
    table.columns.push_back({std::string(pol) + "R", "dB"});
    table.columns.push_back({std::string(pol) + "floor", "dB", NumberStyle::one_decimal});
  }
  table.columns.push_back({"remark", ""});
  for (const AngleRow& bin : reading.rows) {
    if (is_empty(bin)) continue;
    std::vector<Cell> row{fmt::format("{:.3g}..{:.3g}", bin.lo_deg, bin.hi_deg)};
    for (const AngleReading& r : bin.readings)
      row.insert(row.end(), {r.share_db, reflection_text(r.reflection),
                             r.outgoing_w_s2 > 0.0 ? Cell{r.reflection.floor_db} : Cell{}});
    row.push_back(notes_of(bin));
    table.rows.push_back(std::move(row));
  }
  return table;
}

Table power_rows(const AuditReport& report) {
  Table table;
  table.columns = {face_column,           {"frequency", "Hz"},    {"plane position along normal", "m"},
                   {"clear area", "m^2"}, {"net clear", "W s^2"}, {"net whole", "W s^2"},
                   {"incident", "W s^2"}};
  for (const char* range : {"", " to 40 deg"}) {
    const auto name = [range](const char* what) { return std::string(what) + range; };
    table.columns.insert(table.columns.end(), {{name("outgoing"), "W s^2"},
                                               {name("returned"), "W s^2"},
                                               {name("R"), "dB"},
                                               {name("R low"), "dB"},
                                               {name("R high"), "dB"},
                                               {name("reading"), ""},
                                               {name("floor"), "dB"}});
  }
  table.columns.push_back({"remark", ""});
  for (const FaceReport& face : report.faces) {
    for (const FaceReading& reading : face.readings) {
      std::vector<Cell> row{text(name_of(face.side)),
                            reading.frequency_hz,
                            face.plane_m,
                            face.clear_area_m2,
                            number(clear_net(reading)),
                            reading.net ? Cell{reading.net->whole_w_s2} : Cell{},
                            number(reading.incident_w_s2)};
      if (face.not_split_because.empty()) {
        for (AngleRange range : {AngleRange::all, AngleRange::near_normal}) {
          const AngleSum& sum = sum_over(reading, range);
          const Reflection& r = sum.reflection;
          row.insert(row.end(), {sum.outgoing_w_s2, sum.returned_w_s2});
          row.insert(row.end(),
                     {Cell{r.value_db}, Cell{r.low_db}, Cell{r.high_db}, name_of(r.kind), Cell{r.floor_db}});
          if (!(sum.outgoing_w_s2 > 0.0)) std::fill(row.end() - 5, row.end(), Cell{});
        }
      } else {
        row.resize(table.columns.size() - 1);
      }
      row.push_back(face.not_split_because);
      table.rows.push_back(std::move(row));
    }
  }
  return table;
}

Table reflection_rows(const AuditReport& report) {
  Table table;
  table.columns = {face_column,
                   {"frequency", "Hz"},
                   {"polarisation", ""},
                   {"incidence from", "deg"},
                   {"incidence to", "deg"},
                   {"outgoing", "W s^2"},
                   {"outgoing share", "dB"},
                   {"returned", "W s^2"},
                   {"R", "dB"},
                   {"R low", "dB"},
                   {"R high", "dB"},
                   {"reading", ""},
                   {"floor", "dB"},
                   {"not illuminated", "", NumberStyle::whole},
                   {"walk-off", "", NumberStyle::whole}};
  for (const FaceReport& face : report.faces) {
    for (const FaceReading& reading : face.readings) {
      for (Polarisation pol : both_polarisations) {
        for (const AngleRow& bin : reading.rows) {
          if (is_empty(bin)) continue;
          const AngleReading& at = bin.readings[index_of(pol)];
          const Reflection& r = at.reflection;
          const bool any = at.outgoing_w_s2 > 0.0;
          table.rows.push_back(
              {text(name_of(face.side)), reading.frequency_hz, name_of(pol), bin.lo_deg, bin.hi_deg,
               at.outgoing_w_s2, at.share_db, at.returned_w_s2, any ? Cell{r.value_db} : Cell{},
               any ? Cell{r.low_db} : Cell{}, any ? Cell{r.high_db} : Cell{}, name_of(r.kind),
               any ? Cell{r.floor_db} : Cell{}, at.not_illuminated ? 1.0 : 0.0, bin.walk_off ? 1.0 : 0.0});
        }
      }
    }
  }
  return table;
}

}  // namespace wanewall
