// wanewall compare: by how much records differ from a reference.
#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <filesystem>
#include <iostream>
#include <memory>
#include <optional>
#include <stdexcept>
#include <string>
#include <vector>

#include "io/atomic_file.hpp"
#include "io/commands.hpp"
#include "io/picture.hpp"
#include "io/quantity.hpp"
#include "io/record.hpp"
#include "io/tables_document.hpp"
#include "io/terminal.hpp"
#include "postproc/compare.hpp"

namespace wanewall {
namespace {

namespace fs = std::filesystem;

struct CompareOptions {
  std::string reference;
  std::vector<std::string> records;
  std::string csv_path;
  std::string picture_path;
  std::string point;
  std::string field = "E";
  std::string below;
};

struct Outcome {
  std::string record;
  Comparison comparison;
};

constexpr std::size_t most_points_of_a_curve = 1500;

// The level of --below; empty, after telling why, when the text is none.
std::optional<double> level_of(const std::string& text) {
  const ParsedQuantity level = parse_quantity(text, Family::level);
  if (!level) {
    warn(fmt::format(
        "wanewall: --below \"{}\" is not a level\n  allowed: a number in dB, such as \"-80 dB\"\n", text));
    return std::nullopt;
  }
  return level.value;
}

Comparison compared(const Record& reference, const std::string& reference_path, const std::string& path) {
  const Record record(path);
  try {
    return compare({reference.lattice, reference.result}, {record.lattice, record.result},
                   point_frequencies_hz(reference, {}));
  } catch (const std::invalid_argument& error) {
    throw FileError(
        fmt::format("{}: cannot be compared with {}: {}\n"
                    "  next: run both with the same mesh.cell and the same Courant number",
                    path, reference_path, error.what()));
  }
}

void require_something_shared(const Comparison& comparison, const std::string& reference,
                              const std::string& path) {
  if (!comparison.points.empty() || !comparison.faces.empty()) return;
  std::string why;
  for (const std::string& note : comparison.notes) why += "\n  " + note;
  throw FileError(
      fmt::format("{}: shares neither points nor audit planes with {}{}\n"
                  "  next: record points of the same name and place in both scenes",
                  path, reference, why));
}

std::string comparison_text(const Outcome& outcome) {
  const Comparison& c = outcome.comparison;
  std::string text = fmt::format("## {}\n\n", outcome.record);
  for (const std::string& note : c.notes) text += "- note: " + note + "\n";
  if (!c.notes.empty()) text += "\n";
  if (!c.points.empty())
    text += to_markdown(point_error_table(c)) + "\nError in the band, |DFT(F - F_ref)| / |DFT(F_ref)|:\n\n" +
            to_markdown(band_error_table(c)) + "\n";
  if (!c.faces.empty())
    text += "Fourier sums on the audit planes, inside the clear cross-section:\n\n" +
            to_markdown(face_error_table(c)) + "\n";
  return text;
}

constexpr const char* how_to_read =
    R"(- Peak error: largest |F - F_ref| over time against the largest |F_ref|, for F = E and F = H as vectors; rms
  error: root mean square over time of the one against that of the other.
- `equal`: no difference at all. `no level`: the reference is zero there, or a difference is not finite.

)";

const PointError* point_for_picture(const Comparison& comparison, const std::string& name) {
  if (name.empty()) return worst_point(comparison);
  for (const PointError& point : comparison.points)
    if (point.name == name) return &point;
  return nullptr;
}

LineChart chart_of(const std::vector<Outcome>& outcomes, const CompareOptions& options) {
  LineChart chart;
  chart.title = fmt::format("Difference from {}", fs::path(options.reference).filename().string());
  chart.x_label = "time [ns]";
  chart.y_label = fmt::format("|{0} - {0}_ref| / max |{0}_ref| [dB]", options.field);
  double highest_db = -300.0, end_ns = 0.0;
  for (const Outcome& outcome : outcomes) {
    const PointError* point = point_for_picture(outcome.comparison, options.point);
    if (point == nullptr)
      throw FileError(
          fmt::format("{}: has no point \"{}\" in common with {}\n  next: name a point of both with --point",
                      outcome.record, options.point, options.reference));
    const FieldError& error = options.field == "E" ? point->e : point->h;
    Curve curve;
    curve.label = fmt::format("{}, {}", fs::path(outcome.record).stem().string(), point->name);
    const double offset = options.field == "E" ? 0.0 : 0.5;
    for (std::size_t n = 0; n < error.change.size(); ++n) {
      curve.x.push_back((static_cast<double>(n) + offset) * outcome.comparison.dt_s * 1e9);
      curve.y.push_back(20.0 * std::log10(error.change[n] / error.reference_peak));
      if (std::isfinite(curve.y.back())) highest_db = std::max(highest_db, curve.y.back());
    }
    if (!curve.x.empty()) end_ns = std::max(end_ns, curve.x.back());
    chart.curves.push_back(thinned(curve, most_points_of_a_curve));
  }
  const double top_db = 20.0 * std::ceil((highest_db + 1e-9) / 20.0);
  chart.y_range = {top_db - 200.0, top_db};
  if (end_ns > 0.0) chart.x_range = {0.0, end_ns};
  return chart;
}

void write_csv(const std::vector<Outcome>& outcomes, const std::string& path) {
  Table all;
  for (const Outcome& outcome : outcomes) {
    Table rows = comparison_rows(outcome.record, outcome.comparison);
    all.columns = rows.columns;
    std::move(rows.rows.begin(), rows.rows.end(), std::back_inserter(all.rows));
  }
  write_atomically(path, to_csv(all));
  warn("wrote " + path + "\n");
}

// Every record whose peak error is above the level, by name.
ExitCode verdict(const std::vector<Outcome>& outcomes, double below_db) {
  ExitCode code = ExitCode::done;
  for (const Outcome& outcome : outcomes) {
    const double worst_db = worst_peak_db(outcome.comparison);
    const bool holds = !outcome.comparison.points.empty() && worst_db <= below_db;
    std::cout << fmt::format("{}: largest peak error {:.1f} dB, {} {:g} dB\n", outcome.record, worst_db,
                             holds ? "not above" : "ABOVE", below_db);
    if (!holds) code = ExitCode::goal_missed;
  }
  return code;
}

ExitCode compare_records(const CompareOptions& options) {
  std::optional<double> below_db;
  if (!options.below.empty()) {
    below_db = level_of(options.below);
    if (!below_db) return ExitCode::command_line;
  }
  const Record reference(options.reference);
  std::vector<Outcome> outcomes;
  for (const std::string& path : options.records) {
    outcomes.push_back({path, compared(reference, options.reference, path)});
    require_something_shared(outcomes.back().comparison, options.reference, path);
    if (below_db && outcomes.back().comparison.points.empty())
      throw FileError(
          fmt::format("{}: shares no points with {}, so --below has nothing to judge\n"
                      "  next: record points of the same name and place in both scenes",
                      path, options.reference));
  }
  std::cout << fmt::format("# Differences from {}\n\n", options.reference) << how_to_read;
  for (const Outcome& outcome : outcomes) std::cout << comparison_text(outcome);
  if (!options.csv_path.empty()) write_csv(outcomes, options.csv_path);
  if (!options.picture_path.empty()) {
    draw_svg(chart_of(outcomes, options), options.picture_path);
    warn("wrote " + options.picture_path + "\n");
  }
  return below_db ? verdict(outcomes, *below_db) : ExitCode::done;
}

}  // namespace

void add_compare_command(CLI::App& app, Action& action) {
  auto options = std::make_shared<CompareOptions>();
  CLI::App* command = app.add_subcommand("compare", "Say by how much records differ from a reference");
  command->add_option("reference", options->reference, "Record that the others are compared with")
      ->required();
  command->add_option("records", options->records, "Records of the same scene with other shells or sizes")
      ->required();
  command->add_option("--csv", options->csv_path, "File to write all figures into, per frequency");
  command->add_option("--picture", options->picture_path,
                      "SVG file to draw the difference against time into; needs the program gnuplot");
  command->add_option("--point", options->point, "Point to draw; default: each record's worst");
  command->add_option("--field", options->field, "Field to draw")
      ->check(CLI::IsMember({"E", "H"}))
      ->capture_default_str();
  command->add_option(
      "--below", options->below,
      "Verdict: exit code 7 when a peak error of E or H at a shared point is above this level");
  command->footer(
      "Points count as shared when name and place agree, audit planes when face, place and frequencies do. "
      "The\n"
      "lattices may differ in extent; the time step must be the same.\n\n"
      "Example:\n"
      "  wanewall compare large.h5 drum_6_cells.h5 drum_10_cells.h5 --picture shells.svg --below \"-80 dB\"");
  command->callback([options, &action] { action = [options] { return compare_records(*options); }; });
}

}  // namespace wanewall
