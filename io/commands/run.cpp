// wanewall run: computes a scene and writes its record.
#include <fmt/format.h>

#include <filesystem>
#include <iostream>
#include <memory>
#include <string>
#include <system_error>

#include "io/commands.hpp"
#include "io/provenance.hpp"
#include "io/record.hpp"
#include "io/scene.hpp"
#include "io/tables_document.hpp"
#include "io/terminal.hpp"

namespace wanewall {
namespace {

namespace fs = std::filesystem;

struct RunOptions {
  std::string scene_path;
  std::string record_path;
  int threads = 0;
  std::string schedule;
  bool xdmf = false;
  bool quiet = false;
  bool force = false;
  bool tables = false;
};

std::string xdmf_path_of(const std::string& record_path) {
  return record_path + ".xdmf";
}

// Says before the run what would otherwise be found when there is something to lose. What remains
// (permissions, a folder of that name) the record's writer finds when it opens its file, which is before the
// run too.
void require_free_target(const std::string& path, const RunOptions& options) {
  std::error_code ignored;
  const fs::path target(path);
  const fs::path folder = target.parent_path();
  if (!folder.empty() && !fs::is_directory(folder, ignored)) {
    throw FileError(fmt::format("{}: the folder {} does not exist\n  next: mkdir -p '{}'", path,
                                folder.string(), folder.string()));
  }
  if (fs::equivalent(target, options.scene_path, ignored)) {
    throw FileError(
        fmt::format("{}: is the scene itself\n  next: give the record another name with --record", path));
  }
  if (fs::exists(target, ignored) && !options.force) {
    throw FileError(
        fmt::format("{}: exists already, and is not overwritten unasked\n"
                    "  next: --record with another name, or --force to replace it once the new one is whole",
                    path));
  }
}

// The record tells the values that were really used.
void use_instead(Scene& scene, const std::string& key, const std::string& value) {
  for (UsedValue& used : scene.used)
    if (used.path == key) used = {key, value, false};
}

void apply_overrides(Scene& scene, const RunOptions& options) {
  if (options.threads > 0) {
    scene.problem.threads = options.threads;
    use_instead(scene, "run.threads", std::to_string(options.threads));
  }
  if (!options.schedule.empty()) {
    scene.problem.schedule = options.schedule == "plain" ? Schedule::plain : Schedule::fused;
    use_instead(scene, "run.schedule", options.schedule);
  }
}

// An allocation on Linux succeeds long before the memory is there, and the run would be killed in the night.
void require_memory(const Problem& problem) {
  const double needed = footprint_of(problem).total();
  const double present = machine_memory_bytes();
  if (present > 0.0 && needed > present) {
    throw ProblemError(fmt::format(
        "the run needs {} of memory, this machine has {}\n"
        "  next: see what needs it with 'wanewall check', then make cells larger, the volume smaller, or "
        "record less",
        bytes_text(needed), bytes_text(present)));
  }
}

std::string reason_text(const RunResult& result, const Problem& problem) {
  const double end_s = time_of_e_s(result.steps, problem.lattice.dt_s);
  const std::string when = fmt::format("step {} ({:.4g} ns)", result.steps, end_s * 1e9);
  switch (result.reason) {
    case StopReason::reached_end:
      return "reached its end at " + when;
    case StopReason::energy_fell:
      return fmt::format("ended at {}: the field energy fell below {:g} dB of its largest value", when,
                         problem.stop.energy_below_db.value_or(0.0));
    case StopReason::interrupted:
      return "was stopped early, at " + when + "; the record holds what was computed until then";
    case StopReason::not_finite:
      return fmt::format(
          "ended at {}: the fields became non-finite, first seen in {}\n"
          "  next: see whether the Courant number is below 1 and media and layers are passive; the record "
          "holds what "
          "was computed until then",
          when, result.not_finite_where);
  }
  return "ended";
}

ExitCode exit_code_of(StopReason reason) {
  switch (reason) {
    case StopReason::interrupted:
      return ExitCode::stopped_early;
    case StopReason::not_finite:
      return ExitCode::not_finite;
    case StopReason::reached_end:
    case StopReason::energy_fell:
      break;
  }
  return ExitCode::done;
}

std::string start_text(const Scene& scene, const std::string& record_path) {
  const Index3 n = scene.problem.lattice.cells();
  return fmt::format("{}: {} x {} x {} cells, {} precision, at most {} steps of {:.4g} ps; record {}\n",
                     scene.title.empty() ? scene.file : scene.title, n[0], n[1], n[2],
                     scene.problem.precision == Precision::single_precision ? "single" : "double",
                     scene.problem.last_step(), scene.problem.lattice.dt_s * 1e12, record_path);
}

std::string cost_text(const RunResult& result, const Problem& problem) {
  std::string text = fmt::format("built in {}, marched in {}", duration_text(result.build_seconds),
                                 duration_text(result.march_seconds));
  if (result.march_seconds > 0.0) {
    const double rate = problem.lattice.n_cells() * static_cast<double>(result.steps) / result.march_seconds;
    text += fmt::format(" at {:.3g} Gcell/s", rate * 1e-9);
  }
  return text + fmt::format(" on {} thread{}, {} schedule, {} code\n", result.threads,
                            result.threads == 1 ? "" : "s", name_of(problem.schedule), result.vector_code);
}

// Made from the file, not from what is still in memory, so that it is the same as `wanewall tables` would
// say.
std::string tables_text(const std::string& record_path) {
  const Record record(record_path);
  const ReportChoice everything;
  return tables_markdown(record, audit_report(record.result.audit, record.lattice, everything), everything);
}

ExitCode run_scene(const RunOptions& options) {
  const std::string started = utc_now();
  const std::string record_path = options.record_path.empty()
                                      ? fs::path(options.scene_path).stem().string() + ".h5"
                                      : options.record_path;
  Scene scene = read_scene(options.scene_path);
  for (const std::string& warning : scene.warnings) warn("warning: " + warning + "\n");
  require_free_target(record_path, options);
  if (options.xdmf) require_free_target(xdmf_path_of(record_path), options);
  apply_overrides(scene, options);
  require_memory(scene.problem);

  const ProgressStyle style = options.quiet ? ProgressStyle::none : progress_style_of_output();
  ProgressMonitor monitor(style, scene.problem.stop.energy_below_db.has_value(), terminal_columns(), say);
  const StopSignals signals;
  RecordWriter writer(record_path, scene);
  if (!options.quiet) say(start_text(scene, record_path));
  const RunResult result = run(scene.problem, writer, monitor);
  monitor.close();

  Provenance provenance = provenance_of_program();
  provenance.started_utc = started;
  provenance.ended_utc = utc_now();
  provenance.threads = result.threads;
  provenance.vector_code = result.vector_code;
  provenance.schedule = name_of(scene.problem.schedule);
  writer.finish(result, provenance, options.xdmf);

  const ExitCode code = exit_code_of(result.reason);
  const std::string ending = "the run " + reason_text(result, scene.problem) + "\n";
  // A run that did not end as planned says so even when it is told to be quiet.
  if (code != ExitCode::done) {
    warn("wanewall: " + ending);
  } else if (!options.quiet) {
    say(ending);
  }
  if (!options.quiet) {
    say(cost_text(result, scene.problem) + "wrote " + record_path + "\n");
    if (options.xdmf) say("wrote " + xdmf_path_of(record_path) + "\n");
  }
  if (options.tables && code != ExitCode::not_finite) std::cout << "\n" << tables_text(record_path);
  return code;
}

}  // namespace

void add_run_command(CLI::App& app, Action& action) {
  auto options = std::make_shared<RunOptions>();
  CLI::App* command = app.add_subcommand("run", "Compute a scene and write its record");
  command->add_option("scene", options->scene_path, "Scene file (YAML)")->required();
  command->add_option("--record", options->record_path,
                      "Record file to write; default: the scene's name with .h5, in the current folder");
  command->add_option("--threads", options->threads, "Threads; default: the scene's, else one per processor")
      ->check(CLI::Range(1, 4096));
  command
      ->add_option("--schedule", options->schedule, "Order in which rows are visited; the result is the same")
      ->check(CLI::IsMember({"plain", "fused"}));
  command->add_flag("--xdmf", options->xdmf,
                    "Also write an XDMF file beside the record, for general viewers");
  command->add_flag("--force", options->force, "Replace an existing record, once the new one is whole");
  command->add_flag("--tables", options->tables, "Print the tables at the end, as 'wanewall tables' does");
  command->add_flag("--quiet", options->quiet, "Say nothing unless something is wrong");
  command->footer(
      "Ctrl-C ends the run at the next step and keeps what was computed (exit code 5); a second Ctrl-C ends "
      "at once\n"
      "and keeps nothing.\n\n"
      "Example:\n"
      "  wanewall run drum.yaml --record night/drum.h5 --threads 8 --xdmf");
  command->callback([options, &action] { action = [options] { return run_scene(*options); }; });
}

}  // namespace wanewall
