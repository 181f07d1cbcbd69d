// wanewall tables: what a record says about the shell's faces and the recorded points.
#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <filesystem>
#include <iostream>
#include <memory>
#include <optional>
#include <stdexcept>
#include <string>
#include <system_error>
#include <vector>

#include "io/atomic_file.hpp"
#include "io/commands.hpp"
#include "io/quantity.hpp"
#include "io/record.hpp"
#include "io/tables_document.hpp"
#include "io/terminal.hpp"

namespace wanewall {
namespace {

namespace fs = std::filesystem;

struct TablesOptions {
  std::string record_path;
  std::string folder;
  std::vector<std::string> faces;
  std::vector<std::string> frequencies;
  bool csv_only = false;
};

std::string list_text(const std::vector<double>& frequencies_hz) {
  std::string text;
  for (double hz : frequencies_hz)
    text += (text.empty() ? "" : ", ") + format_quantity(hz, Family::frequency, 6);
  return text;
}

// Index of an audited frequency; empty, after telling why, when the text does not name one.
std::optional<std::size_t> find_frequency(const std::string& text, const std::vector<double>& audited_hz) {
  const ParsedQuantity wanted = parse_quantity(text, Family::frequency);
  if (!wanted) {
    warn(fmt::format("wanewall: --frequency \"{}\" is not a frequency\n  allowed: a number with one of {}\n",
                     text, unit_list(Family::frequency)));
    return std::nullopt;
  }
  const auto nearest = std::min_element(audited_hz.begin(), audited_hz.end(), [&](double a, double b) {
    return std::abs(a - wanted.value) < std::abs(b - wanted.value);
  });
  if (nearest == audited_hz.end() || std::abs(*nearest - wanted.value) > 1e-3 * wanted.value) {
    warn(fmt::format("wanewall: --frequency \"{}\" was not audited\n  allowed: {}\n", text,
                     audited_hz.empty() ? "none, the record holds no shell audit" : list_text(audited_hz)));
    return std::nullopt;
  }
  return static_cast<std::size_t>(nearest - audited_hz.begin());
}

std::optional<Side> find_face(const std::string& text, const AuditRecord& audit) {
  std::string audited;
  for (const AuditFace& face : audit.faces) {
    if (name_of(face.side) == text) return face.side;
    audited += (audited.empty() ? "" : ", ") + std::string(name_of(face.side));
  }
  warn(fmt::format("wanewall: --face {} was not audited\n  allowed: {}\n", text,
                   audited.empty() ? "none, the record holds no shell audit" : audited));
  return std::nullopt;
}

std::optional<ReportChoice> choice_of(const TablesOptions& options, const AuditRecord& audit) {
  ReportChoice choice;
  for (const std::string& text : options.faces) {
    const std::optional<Side> side = find_face(text, audit);
    if (!side) return std::nullopt;
    choice.faces.push_back(*side);
  }
  for (const std::string& text : options.frequencies) {
    const std::optional<std::size_t> f = find_frequency(text, audit.frequencies_hz);
    if (!f) return std::nullopt;
    choice.frequencies.push_back(*f);
  }
  return choice;
}

void make_folder(const std::string& folder) {
  std::error_code error;
  fs::create_directories(folder, error);
  if (error || !fs::is_directory(folder))
    throw FileError(fmt::format("{}: the folder cannot be made: {}\n  next: choose another with --out",
                                folder, error ? error.message() : "a file has that name"));
}

ExitCode show_tables(const TablesOptions& options) {
  const Record record(options.record_path);
  const std::optional<ReportChoice> choice = choice_of(options, record.result.audit);
  if (!choice) return ExitCode::command_line;
  AuditReport report;
  try {
    report = audit_report(record.result.audit, record.lattice, *choice);
  } catch (const std::invalid_argument& error) {
    throw FileError(fmt::format("{}: the record does not fit together: {}\n  next: run the scene again",
                                options.record_path, error.what()));
  }
  const std::string markdown = options.csv_only ? "" : tables_markdown(record, report, *choice);
  const std::vector<NamedText> csv_files = tables_csv(record, report, *choice);
  if (options.csv_only && csv_files.empty())
    warn(fmt::format("wanewall: {} holds neither a shell audit nor points, so there is no table\n",
                     options.record_path));

  if (options.folder.empty()) {
    std::cout << (options.csv_only && !csv_files.empty() ? csv_files.front().text : markdown);
    return ExitCode::done;
  }
  make_folder(options.folder);
  std::vector<NamedText> files = csv_files;
  if (!options.csv_only) files.insert(files.begin(), {"tables.md", markdown});
  std::cout << markdown;
  for (const NamedText& file : files) {
    const std::string path = (fs::path(options.folder) / file.file_name).string();
    write_atomically(path, file.text);
    warn("wrote " + path + "\n");
  }
  return ExitCode::done;
}

}  // namespace

void add_tables_command(CLI::App& app, Action& action) {
  auto options = std::make_shared<TablesOptions>();
  CLI::App* command = app.add_subcommand("tables", "Print reflection, power and point tables of a record");
  command->add_option("record", options->record_path, "Record of a run")->required();
  command->add_option(
      "--out", options->folder,
      "Folder to write tables.md, reflection.csv, power.csv, points.csv and point_spectra.csv into");
  command->add_option("--face", options->faces, "Only this face; may be given several times")
      ->check(CLI::IsMember({"x-", "x+", "y-", "y+", "z-", "z+"}));
  command->add_option("--frequency", options->frequencies,
                      "Only this audited frequency, with its unit; may be given several times");
  command->add_flag("--csv-only", options->csv_only,
                    "No Markdown: write only the CSV files, or print the first of them without --out");
  command->footer(
      "Examples:\n"
      "  wanewall tables drum.h5\n"
      "  wanewall tables drum.h5 --out night/drum --face z+ --face z-\n"
      "  wanewall tables drum.h5 --frequency \"1 GHz\" --csv-only > reflection.csv");
  command->callback([options, &action] { action = [options] { return show_tables(*options); }; });
}

}  // namespace wanewall
