// wanewall probe: the field at a point, from a record's snapshots or recorded points.
#include <fmt/format.h>

#include <iostream>
#include <memory>
#include <optional>
#include <stdexcept>
#include <string>
#include <vector>

#include "io/atomic_file.hpp"
#include "io/commands.hpp"
#include "io/probe_document.hpp"
#include "io/quantity.hpp"
#include "io/record.hpp"
#include "io/terminal.hpp"

namespace wanewall {
namespace {

struct ProbeOptions {
  std::string record_path;
  std::string at, snapshot, point;
  std::string interpolation = "linear";
  std::vector<std::string> frequencies;
  std::string csv_path;
  bool list = false;
};

/// A wrong command line, found only with the record at hand.
struct CommandLineError : std::runtime_error {
  using std::runtime_error::runtime_error;
};

/// Splits "1 mm, -2 mm 3mm" where numbers begin; commas and blanks separate alike.
std::vector<std::string> split_at_numbers(const std::string& text) {
  std::vector<std::string> parts;
  std::string word;
  const auto end_word = [&] {
    if (word.empty()) return;
    const bool is_number = word.find_first_of("0123456789+-.") == 0;
    if (is_number || parts.empty())
      parts.push_back(word);
    else
      parts.back() += " " + word;
    word.clear();
  };
  for (const char c : text) {
    if (c == ',' || c == ';' || c == ' ' || c == '\t')
      end_word();
    else
      word += c;
  }
  end_word();
  return parts;
}

std::vector<double> quantities_in(const std::string& text, Family family, const std::string& option) {
  std::vector<double> values;
  for (const std::string& part : split_at_numbers(text)) {
    const ParsedQuantity parsed = parse_quantity(part, family);
    if (!parsed)
      throw CommandLineError(fmt::format("{}: \"{}\" is not a {}\n  allowed: a number with one of {}", option,
                                         part, name_of(family), unit_list(family)));
    values.push_back(parsed.value);
  }
  return values;
}

Vec3 point_in(const std::string& text) {
  const std::vector<double> values = quantities_in(text, Family::length, "--at");
  if (values.size() != 3)
    throw CommandLineError(
        fmt::format("--at \"{}\" has {} coordinates\n  allowed: three, x y z, each with its unit, "
                    "e.g. \"0 m, 0 m, 50 mm\"",
                    text, values.size()));
  return {values[0], values[1], values[2]};
}

/// The snapshots called `name`, or all when there is no name.
std::vector<RecordedSnapshot> snapshots_called(const std::string& name, std::vector<RecordedSnapshot> all) {
  if (name.empty()) return all;
  std::string names;
  for (const RecordedSnapshot& snapshot : all) {
    if (snapshot.name == name) return {snapshot};
    names += (names.empty() ? "" : ", ") + snapshot.name;
  }
  throw CommandLineError(fmt::format("--snapshot {} was not recorded\n  allowed: {}", name,
                                     names.empty() ? "none, the record holds no snapshots" : names));
}

ProbedPoint probe_snapshots(const Record& record, const ProbeOptions& options) {
  const Vec3 at_m = point_in(options.at);
  const std::vector<RecordedSnapshot> snapshots =
      snapshots_called(options.snapshot, recorded_snapshots(record));
  const RecordedSnapshot* snapshot = best_snapshot_at(snapshots, at_m);
  if (snapshot == nullptr) {
    std::string boxes;
    for (const RecordedSnapshot& one : snapshots)
      boxes += fmt::format("\n    {}: {}", one.name, box_text(common_extent(one.fields)));
    throw CommandLineError(fmt::format("--at \"{}\" lies in no snapshot of {}\n  allowed:{}", options.at,
                                       options.record_path,
                                       boxes.empty() ? " nothing, the record holds no snapshots" : boxes));
  }
  ProbedPoint point;
  point.position_m = at_m;
  point.source = fmt::format("snapshot \"{}\"", snapshot->name);
  const Interpolation interpolation =
      options.interpolation == "cubic" ? Interpolation::cubic : Interpolation::linear;
  for (const RecordedField& field : snapshot->fields) {
    if (const auto series = series_at(field, at_m, interpolation))
      point.series.push_back(*series);
    else
      point.missing.push_back(field.component);
  }
  return point;
}

ProbedPoint probe_point(const Record& record, const ProbeOptions& options) {
  std::string names;
  for (const PointSeries& series : record.result.points) {
    if (series.name == options.point)
      return {series.position_m,
              fmt::format("point \"{}\"", series.name),
              series_of(series, record.lattice.dt_s),
              {}};
    names += (names.empty() ? "" : ", ") + series.name;
  }
  throw CommandLineError(fmt::format("--point {} was not recorded\n  allowed: {}", options.point,
                                     names.empty() ? "none, the record holds no points" : names));
}

std::vector<double> frequencies_in(const ProbeOptions& options, const ProbedPoint& point) {
  std::string text;
  for (const std::string& part : options.frequencies) text += part + " ";
  std::vector<double> frequencies_hz = quantities_in(text, Family::frequency, "--frequencies");
  const double limit_hz = nyquist_limit_hz(point.series);
  for (const double frequency_hz : frequencies_hz)
    if (!(frequency_hz >= 0.0 && frequency_hz < limit_hz))
      throw CommandLineError(
          fmt::format("--frequencies: {} cannot be told from these samples\n  allowed: from 0 Hz to below "
                      "the Nyquist limit {} of "
                      "{}; record more often for more",
                      format_quantity(frequency_hz, Family::frequency),
                      format_quantity(limit_hz, Family::frequency), point.source));
  return frequencies_hz;
}

ExitCode probe(const ProbeOptions& options) {
  const int ways = (options.at.empty() ? 0 : 1) + (options.point.empty() ? 0 : 1) + (options.list ? 1 : 0);
  if (ways != 1)
    throw CommandLineError("give one of --at, --point and --list\n  next: wanewall probe --help");
  if (options.at.empty() && !options.snapshot.empty())
    throw CommandLineError("--snapshot goes with --at only");
  if (options.list && !(options.csv_path.empty() && options.frequencies.empty()))
    throw CommandLineError("--csv and --frequencies go with --at or --point only");
  const Record record(options.record_path, AuditPlanes::leave);
  if (options.list) {
    std::cout << probe_list_markdown(record, options.record_path, recorded_snapshots(record));
    return ExitCode::done;
  }
  try {
    const ProbedPoint point =
        options.at.empty() ? probe_point(record, options) : probe_snapshots(record, options);
    for (const FieldSeries& series : point.series)
      if (series.values.empty())
        throw FileError(fmt::format("{}: {} holds no samples: the run ended before the first",
                                    options.record_path, point.source));
    const std::vector<double> frequencies_hz = frequencies_in(options, point);
    std::cout << probe_markdown(record, options.record_path, point, frequencies_hz);
    if (!options.csv_path.empty()) {
      write_atomically(options.csv_path, to_csv(probe_table(point, frequencies_hz)));
      warn("wrote " + options.csv_path + "\n");
    }
  } catch (const std::invalid_argument& error) {
    throw FileError(fmt::format("{}: the record does not fit together: {}\n  next: run the scene again",
                                options.record_path, error.what()));
  }
  return ExitCode::done;
}

ExitCode probe_or_explain(const ProbeOptions& options) {
  try {
    return probe(options);
  } catch (const CommandLineError& error) {
    warn(fmt::format("wanewall: {}\n", error.what()));
    return ExitCode::command_line;
  }
}

}  // namespace

void add_probe_command(CLI::App& app, Action& action) {
  auto options = std::make_shared<ProbeOptions>();
  CLI::App* command = app.add_subcommand("probe", "Print the field at a point of a record's snapshots");
  command->add_option("record", options->record_path, "Record of a run")->required();
  command->add_option("--at", options->at, "The point, x y z, each with its unit: \"0 m, 0 m, 50 mm\"");
  command->add_option("--point", options->point, "Name of a recorded point instead");
  command->add_flag("--list", options->list, "List what can be probed instead");
  command->add_option(
      "--snapshot", options->snapshot,
      "Name of the snapshot to take; default: the one with most components there, then the densest");
  command
      ->add_option("--interpolation", options->interpolation,
                   "linear (default), or cubic: better in one medium, overshoots across boundaries")
      ->check(CLI::IsMember({"linear", "cubic"}));
  command->add_option("--frequencies", options->frequencies,
                      "Print the spectrum at these frequencies, each with its unit, instead of the series");
  command->add_option("--csv", options->csv_path, "Also write the series or spectrum into this CSV file");
  command->footer(
      "Examples:\n"
      "  wanewall probe drum.h5 --list\n"
      "  wanewall probe drum.h5 --at \"0 m, 0 m, 5 cm\" --csv field.csv\n"
      "  wanewall probe drum.h5 --at \"0 m, 0 m, 5 cm\" --interpolation cubic --frequencies \"0.5 GHz, 1 "
      "GHz\"\n"
      "  wanewall probe drum.h5 --point above_drum --frequencies \"1 GHz\"");
  command->callback([options, &action] { action = [options] { return probe_or_explain(*options); }; });
}

}  // namespace wanewall
