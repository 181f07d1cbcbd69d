// wanewall run: computes a scene and writes its record.
#include <fmt/format.h>
#include <unistd.h>

#include <filesystem>
#include <memory>
#include <string>
#include <system_error>

#include "io/commands.hpp"
#include "io/provenance.hpp"
#include "io/record.hpp"
#include "io/scene.hpp"
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
};

// Refuses a target that could not be written hours later, before anything is computed.
void require_writable_target(const std::string& path, const std::string& scene_path, bool force) {
  std::error_code ignored;
  const fs::path target(path);
  const fs::path folder = target.has_parent_path() ? target.parent_path() : fs::path(".");
  if (!fs::is_directory(folder, ignored)) {
    throw FileError(fmt::format("{}: the folder {} does not exist\n  next: mkdir -p '{}'", path,
                                folder.string(), folder.string()));
  }
  if (fs::is_directory(target, ignored)) {
    throw FileError(fmt::format("{}: is a folder\n  next: name a file, e.g. --record {}", path,
                                (target / "run.h5").string()));
  }
  if (fs::exists(target, ignored)) {
    if (fs::equivalent(target, scene_path, ignored))
      throw FileError(
          fmt::format("{}: is the scene itself\n  next: give the record another name with --record", path));
    if (!force) {
      throw FileError(fmt::format(
          "{}: exists already, and a record is not overwritten unasked\n"
          "  next: --record with another name, or --force to replace it once the new one is whole",
          path));
    }
  }
  if (access(folder.c_str(), W_OK | X_OK) != 0) {
    throw FileError(
        fmt::format("{}: no permission to write into {}\n  next: choose another folder with --record", path,
                    folder.string()));
  }
}

double machine_memory_bytes() {
  return static_cast<double>(sysconf(_SC_PHYS_PAGES)) * static_cast<double>(sysconf(_SC_PAGE_SIZE));
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

std::string end_text(const RunResult& result, const Scene& scene) {
  std::string text = "the run " + reason_text(result, scene.problem) + "\n";
  const double rate =
      result.march_seconds > 0.0
          ? scene.problem.lattice.n_cells() * static_cast<double>(result.steps) / result.march_seconds
          : 0.0;
  text += fmt::format("built in {}, marched in {}", duration_text(result.build_seconds),
                      duration_text(result.march_seconds));
  if (rate > 0.0) text += fmt::format(" at {:.3g} Gcell/s", rate * 1e-9);
  text += fmt::format(" on {} thread{}, {} schedule, {} code\n", result.threads,
                      result.threads == 1 ? "" : "s", name_of(scene.problem.schedule), result.vector_code);
  return text;
}

ExitCode run_scene(const RunOptions& options) {
  const std::string started = utc_now();
  const std::string record_path = options.record_path.empty()
                                      ? fs::path(options.scene_path).stem().string() + ".h5"
                                      : options.record_path;
  Scene scene = read_scene(options.scene_path);
  for (const std::string& warning : scene.warnings) warn("warning: " + warning + "\n");
  require_writable_target(record_path, options.scene_path, options.force);
  if (options.threads > 0) scene.problem.threads = options.threads;
  if (!options.schedule.empty())
    scene.problem.schedule = options.schedule == "plain" ? Schedule::plain : Schedule::fused;
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

  // A run that did not end as planned says so even when it is told to be quiet.
  const ExitCode code = exit_code_of(result.reason);
  if (code != ExitCode::done) {
    warn("wanewall: the run " + reason_text(result, scene.problem) + "\n");
    if (!options.quiet) say(fmt::format("wrote {}\n", record_path));
  } else if (!options.quiet) {
    say(end_text(result, scene) + fmt::format("wrote {} ({})\n", record_path,
                                              bytes_text(static_cast<double>(fs::file_size(record_path)))));
  }
  if (!options.quiet && options.xdmf) say(fmt::format("wrote {}.xdmf\n", record_path));
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
      ->check(CLI::Range(1, 1024));
  command
      ->add_option("--schedule", options->schedule, "Order in which rows are visited; the result is the same")
      ->check(CLI::IsMember({"plain", "fused"}));
  command->add_flag("--xdmf", options->xdmf,
                    "Also write an XDMF file beside the record, for general viewers");
  command->add_flag("--force", options->force, "Replace an existing record, once the new one is whole");
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
