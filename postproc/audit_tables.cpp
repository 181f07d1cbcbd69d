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

std::string notes_of(const AngleRow& row, const AngleReading& reading) {
  std::string notes = reading.not_illuminated ? "not illuminated" : "";
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

std::string excess_text(const Reflection& reflection, const std::optional<double>& expected_db) {
  if (!expected_db || reflection.kind != Reflection::Kind::value) return "";
  const double excess = reflection.value_db - *expected_db;
  return fmt::format("{:+.1f}", std::abs(excess) < 0.05 ? 0.0 : excess);
}

std::string verdict_text(const FaceReport& face, const std::optional<double>& goal_db) {
  if (!face.not_split_because.empty()) return "net power only: " + face.not_split_because;
  const FaceVerdict verdict = verdict_of(face, goal_db);
  if (!verdict.worst_db) return "nothing outgoing";
  std::string text;
  if (goal_db)
    text = fmt::format("{} the goal of {:.0f} dB",
                       *verdict.holds_goal   ? "holds"
                       : verdict.misses_goal ? "MISSES"
                                             : "floor too high to show",
                       *goal_db);
  const auto add = [&text](const std::string& more) { text += (text.empty() ? "" : "; ") + more; };
  if (verdict.as_designed && verdict.unexpected_db) {
    if (*verdict.as_designed)
      add(fmt::format("as designed to {:.0f} dB", *verdict.unexpected_db));
    else
      add(fmt::format("NOT as designed: {:.1f} dB unexpected", *verdict.unexpected_db));
  }
  if (!face.not_separable_because.empty()) add("not separable");
  return text;
}

Table overview_table(const AuditReport& report, const std::optional<double>& goal_db) {
  Table table;
  table.columns = {face_column,
                   {"shell", ""},
                   {"cells", "", NumberStyle::whole},
                   {"worst R", "dB"},
                   {"expected", "dB", NumberStyle::one_decimal},
                   {"floor", "dB", NumberStyle::one_decimal},
                   {"at", "GHz"},
                   {"worst R to 40 deg", "dB"},
                   {"floor to 40 deg", "dB", NumberStyle::one_decimal},
                   {"verdict", ""}};
  for (const FaceReport& face : report.faces) {
    std::vector<Cell> row{text(name_of(face.side)), text(name_of(face.kind)), double(face.shell_cells)};
    if (const FaceReading* worst = worst_reading(face, AngleRange::all)) {
      const Reflection& r = worst->whole ? worst->whole->reflection : worst->total.reflection;
      row.insert(row.end(), {reflection_text(r),
                             number(worst->whole ? worst->whole->expected_db : worst->total.expected_db),
                             r.floor_db, worst->frequency_hz * 1e-9});
    } else {
      row.resize(row.size() + 4);
    }
    if (const FaceReading* worst = worst_reading(face, AngleRange::near_normal)) {
      const Reflection& r = worst->near_normal.reflection;
      row.insert(row.end(), {reflection_text(r), r.floor_db});
    } else {
      row.resize(row.size() + 2);
    }
    row.push_back(text(verdict_text(face, goal_db)));
    table.rows.push_back(std::move(row));
  }
  return table;
}

Table power_table(const FaceReport& face) {
  const bool is_split = face.not_split_because.empty();
  const bool with_incident = has_incident(face);
  Table table;
  table.columns = {{"frequency", "GHz"}};
  const auto dB = [&](const char* name) { table.columns.push_back({name, "dB", NumberStyle::one_decimal}); };
  const auto level = [&](const char* name) { table.columns.push_back({name, "dB"}); };
  if (face.basis_is_modal) {
    level("R");
    dB("expected");
    level("excess");
    dB("floor");
    dB("closure");
  }
  if (is_split) {
    level("R to 40 deg");
    dB("floor to 40 deg");
    if (!face.basis_is_modal) {
      for (const char* name : {"R, all angles", "R of TE", "R of TM"}) level(name);
      dB("floor, all angles");
      dB("expected, all angles");
    }
    for (const char* name : {"outgoing", "returned"}) table.columns.push_back({name, "W s^2"});
  }
  table.columns.push_back({"net", "W s^2"});
  if (is_split && with_incident) dB("outgoing / incident");
  if (with_incident) dB("net / incident");
  if (face.basis_is_modal) table.columns.push_back({"remark", ""});

  for (const FaceReading& reading : face.readings) {
    std::vector<Cell> row{reading.frequency_hz * 1e-9};
    if (face.basis_is_modal) {
      if (reading.whole) {
        const WholeReading& whole = *reading.whole;
        row.insert(row.end(), {reflection_text(whole.reflection), number(whole.expected_db),
                               excess_text(whole.reflection, whole.expected_db), whole.reflection.floor_db,
                               number(whole.closure_db)});
      } else {
        row.resize(row.size() + 5);
      }
    }
    if (is_split) {
      row.insert(row.end(), {sum_text(reading.near_normal), floor_of(reading.near_normal)});
      if (!face.basis_is_modal)
        row.insert(row.end(),
                   {reflection_text(reading.total.reflection), reflection_text(reading.by_polarisation[0]),
                    reflection_text(reading.by_polarisation[1]), floor_of(reading.total),
                    number(reading.total.expected_db)});
      row.insert(row.end(), {reading.total.outgoing_w_s2, reading.total.returned_w_s2});
    }
    row.push_back(number(clear_net(reading)));
    if (is_split && with_incident)
      row.push_back(level_db(reading.total.outgoing_w_s2, reading.incident_w_s2));
    if (with_incident) row.push_back(net_level(reading));
    if (face.basis_is_modal)
      row.push_back(text(reading.whole && reading.whole->reflection.floor_db > floor_warning_db
                             ? "high floor: record too short?"
                             : ""));
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
  const bool with_theory = std::any_of(reading.rows.begin(), reading.rows.end(),
                                       [](const AngleRow& row) { return row.infinite_face_db.has_value(); });
  table.columns = {{"incidence", "deg"},
                   {"polarisation", ""},
                   {"outgoing share", "dB", NumberStyle::one_decimal},
                   {"R", "dB"}};
  if (with_theory)
    table.columns.insert(table.columns.end(), {{"expected", "dB", NumberStyle::one_decimal},
                                               {"excess", "dB"},
                                               {"R infinite face", "dB", NumberStyle::one_decimal}});
  table.columns.push_back({"floor", "dB", NumberStyle::one_decimal});
  table.columns.push_back({"remark", ""});
  for (Polarisation pol : both_polarisations) {
    for (const AngleRow& bin : reading.rows) {
      if (is_empty(bin)) continue;
      const AngleReading& r = bin.readings[index_of(pol)];
      std::vector<Cell> row{fmt::format("{:.3g}..{:.3g}", bin.lo_deg, bin.hi_deg), name_of(pol), r.share_db,
                            reflection_text(r.reflection)};
      if (with_theory)
        row.insert(row.end(), {number(r.expected_db), excess_text(r.reflection, r.expected_db),
                               number(bin.infinite_face_db)});
      row.push_back(number(r.outgoing_w_s2 > 0.0 ? std::optional(r.reflection.floor_db) : std::nullopt));
      row.push_back(text(notes_of(bin, r)));
      table.rows.push_back(std::move(row));
    }
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
  table.columns.insert(table.columns.end(), {{"whole face R", "dB"},
                                             {"whole face R low", "dB"},
                                             {"whole face R high", "dB"},
                                             {"whole face reading", ""},
                                             {"whole face expected", "dB"},
                                             {"three-plane floor", "dB"},
                                             {"closure", "dB"},
                                             {"split", ""}});
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
        if (reading.whole) {
          const Reflection& r = reading.whole->reflection;
          row.insert(row.end(),
                     {r.value_db, r.low_db, r.high_db, name_of(r.kind), number(reading.whole->expected_db),
                      r.floor_db, number(reading.whole->closure_db)});
        } else {
          row.resize(row.size() + 7);
        }
        row.push_back(face.basis);
      } else {
        row.resize(table.columns.size() - 1);
      }
      row.push_back(face.not_split_because.empty() ? face.not_separable_because : face.not_split_because);
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
                   {"expected", "dB"},
                   {"excess", "dB"},
                   {"R infinite face", "dB"},
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
               any ? Cell{r.floor_db} : Cell{}, number(at.expected_db),
               at.expected_db && any ? Cell{r.value_db - *at.expected_db} : Cell{},
               number(bin.infinite_face_db), at.not_illuminated ? 1.0 : 0.0, bin.walk_off ? 1.0 : 0.0});
        }
      }
    }
  }
  return table;
}

}  // namespace wanewall
