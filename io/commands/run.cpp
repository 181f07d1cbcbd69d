// wanewall run: computes a scene and writes its record.
#include <fmt/format.h>

#include <filesystem>
#include <iostream>
#include <memory>
#include <optional>
#include <stdexcept>
#include <string>
#include <system_error>
#include <vector>

#include "io/commands.hpp"
#include "io/memory_guard.hpp"
#include "io/pace.hpp"
#include "io/provenance.hpp"
#include "io/record.hpp"
#include "io/scene.hpp"
#include "io/snapshot_queue.hpp"
#include "io/tables_document.hpp"
#include "io/terminal.hpp"
#include "io/witness.hpp"

namespace wanewall {
namespace {

namespace fs = std::filesystem;

struct RunOptions {
  std::string scene_path;
  std::string record_path;
  int threads = 0;
  std::string schedule;
  std::vector<int> tiles;
  bool no_pin = false;
  bool xdmf = false;
  bool quiet = false;
  bool force = false;
  bool tables = false;
  bool witness = false;
  std::string witness_faces;
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
  if (!options.tiles.empty()) {
    scene.problem.tiles = {options.tiles[0], options.tiles[1], options.tiles[2]};
    use_instead(scene, "run.tiles",
                fmt::format("[{}, {}, {}]", options.tiles[0], options.tiles[1], options.tiles[2]));
  }
  if (options.no_pin) {
    scene.problem.pin_threads = false;
    use_instead(scene, "run.pin", "false");
  }
  if (!options.schedule.empty()) {
    scene.problem.schedule = schedule_named(options.schedule);
    use_instead(scene, "run.schedule", options.schedule);
  }
}

// Tiles that were fastest before, unless the scene or the command line names some.
void use_known_tiles(Scene& scene) {
  Problem& problem = scene.problem;
  if (problem.tiles || problem.schedule != Schedule::tiles) return;
  if (const std::optional<Pace> pace = known_pace(problem)) problem.tiles = pace->tiles;
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

std::string cost_text(const RunResult& result, const Problem& problem, std::optional<double> disk_wait_s) {
  std::string text = fmt::format("built in {}, marched in {}", duration_text(result.build_seconds),
                                 duration_text(result.march_seconds));
  if (result.march_seconds > 0.0) {
    const double rate = problem.lattice.n_cells() * static_cast<double>(result.steps) / result.march_seconds;
    text += fmt::format(" at {:.3g} Gcell/s", rate * 1e-9);
  }
  std::string schedule = fmt::format("{} schedule", name_of(result.schedule));
  if (result.schedule == Schedule::tiles)
    schedule = fmt::format("tiles of {} x {} rows and {} steps{}", result.tiles.x_rows, result.tiles.y_rows,
                           result.tiles.steps,
                           problem.tiles              ? ""
                           : result.tiles_are_settled ? " (found by trying)"
                                                      : " (the run ended before all shapes were tried)");
  else if (problem.schedule == Schedule::tiles)
    schedule += problem.lattice.periodic[0] && problem.lattice.periodic[1]
                    ? " (no tiles where x and y are both periodic)"
                    : " (faster here than tiles)";
  text += fmt::format(" on {} thread{}, {}, {} code", result.threads, result.threads == 1 ? "" : "s",
                      schedule, result.vector_code);
  if (disk_wait_s) text += fmt::format("; waited {} for the disk", duration_text(*disk_wait_s));
  return text + "\n";
}

// Made from the file, not from what is still in memory, so that it is the same as `wanewall tables` would
// say.
std::string tables_text(const std::string& record_path) {
  const Record record(record_path);
  const ReportChoice everything;
  return tables_markdown(record, audit_report(record.result.audit, record.lattice, everything), everything);
}

// A run and what it is a witness of, if of anything.
struct Planned {
  Scene scene;
  std::string record_path;
  std::string witness_of, witness_faces;
};

struct Finished {
  RunResult result;
  ExitCode code = ExitCode::done;
};

Finished compute(const Planned& planned, const RunOptions& options) {
  Scene scene = planned.scene;
  const bool tiles_were_given = scene.problem.tiles.has_value();
  use_known_tiles(scene);
  const std::string started = utc_now();
  const ProgressStyle style = options.quiet ? ProgressStyle::none : progress_style_of_output();
  ProgressMonitor monitor(style, scene.problem.stop.energy_below_db.has_value(), terminal_columns(), say);
  RecordWriter writer(planned.record_path, scene);
  if (!options.quiet) say(start_text(scene, planned.record_path));
  Finished finished;
  SnapshotQueue queue(writer);
  finished.result = run(scene.problem, queue, monitor);
  const RunResult& result = finished.result;
  monitor.close();
  queue.finish();
  // A run of a moment says little of the next.
  if (!tiles_were_given && result.tiles_are_settled && result.march_seconds > 1.0)
    remember_pace(scene.problem,
                  {result.tiles, scene.problem.lattice.n_cells() * static_cast<double>(result.steps) /
                                     result.march_seconds});

  Provenance provenance = provenance_of_program();
  provenance.started_utc = started;
  provenance.ended_utc = utc_now();
  provenance.threads = result.threads;
  provenance.vector_code = result.vector_code;
  provenance.schedule = name_of(result.schedule);
  if (!scene.problem.recording.snapshots.empty()) provenance.disk_wait_s = queue.waited_s();
  if (!planned.witness_of.empty()) {
    provenance.witness_of = planned.witness_of;
    provenance.witness_faces = planned.witness_faces;
    provenance.witness_layer = witness_layer_text();
  }
  writer.finish(result, provenance, options.xdmf);

  finished.code = exit_code_of(result.reason);
  const std::string ending = "the run " + reason_text(result, scene.problem) + "\n";
  // A run that did not end as planned says so even when it is told to be quiet.
  if (finished.code != ExitCode::done) {
    warn("wanewall: " + ending);
  } else if (!options.quiet) {
    say(ending);
  }
  if (!options.quiet) {
    say(cost_text(result, scene.problem, provenance.disk_wait_s) + "wrote " + planned.record_path + "\n");
    if (options.xdmf) say("wrote " + xdmf_path_of(planned.record_path) + "\n");
  }
  return finished;
}

std::vector<double> compared_frequencies_hz(const Scene& scene, const RunResult& result) {
  if (!result.audit.frequencies_hz.empty()) return result.audit.frequencies_hz;
  constexpr int n = 9;
  std::vector<double> frequencies_hz;
  for (int i = 0; i < n; ++i)
    frequencies_hz.push_back(scene.band_lo_hz + (scene.band_hi_hz - scene.band_lo_hz) * i / (n - 1));
  return frequencies_hz;
}

// The second run, and what the two say about the shell of the first. Both have the same number of steps.
ExitCode compute_witness(const Planned& first, const RunResult& result, WitnessScene& witness,
                         const RunOptions& options) {
  StopRule& stop = witness.scene.problem.stop;
  stop.at_s = time_of_e_s(result.steps, witness.scene.problem.lattice.dt_s);
  stop.energy_below_db.reset();
  const Finished second =
      compute({witness.scene, witness_record_path(first.record_path, witness.faces, first.scene.problem),
               fs::path(first.record_path).filename().string(), face_list_text(witness.faces)},
              options);
  if (second.code == ExitCode::not_finite) return second.code;
  std::cout << "\n"
            << witness_text(first.scene, result, witness, second.result,
                            compared_frequencies_hz(first.scene, result));
  return second.code;
}

void require_free_targets(const std::string& record_path, const RunOptions& options) {
  require_free_target(record_path, options);
  if (options.xdmf) require_free_target(xdmf_path_of(record_path), options);
}

ExitCode run_scene(const RunOptions& options) {
  Planned first;
  first.record_path = options.record_path.empty() ? fs::path(options.scene_path).stem().string() + ".h5"
                                                  : options.record_path;
  first.scene = read_scene(options.scene_path);
  for (const std::string& warning : first.scene.warnings) warn("warning: " + warning + "\n");
  apply_overrides(first.scene, options);
  FaceChoice faces{};
  if (options.witness) {
    try {
      faces = witness_faces(options.witness_faces, first.scene.problem);
    } catch (const std::invalid_argument& error) {
      warn(fmt::format("wanewall: --witness: {}\n  next: wanewall run --help\n", error.what()));
      return ExitCode::command_line;
    }
  }
  if (!options.tiles.empty() && options.tiles[2] > most_tile_steps) {
    warn(fmt::format("wanewall: --tiles: {} steps / at most {}\n  next: wanewall run --help\n",
                     options.tiles[2], most_tile_steps));
    return ExitCode::command_line;
  }
  // All that can stop either run is found before the first begins.
  require_free_targets(first.record_path, options);
  if (options.witness)
    require_free_targets(witness_record_path(first.record_path, faces, first.scene.problem), options);
  require_memory(run_footprint(first.scene.problem));
  std::optional<WitnessScene> witness;
  if (options.witness) {
    witness = witness_scene(first.scene, faces);
    require_memory(run_footprint(witness->scene.problem), "the witness run");
  }

  const StopSignals signals;
  const Finished finished = compute(first, options);
  if (options.tables && finished.code != ExitCode::not_finite)
    std::cout << "\n" << tables_text(first.record_path);
  if (!witness) return finished.code;
  if (finished.code != ExitCode::done) {
    warn("wanewall: no witness run after a run that did not end as planned\n");
    return finished.code;
  }
  return compute_witness(first, finished.result, *witness, options);
}

}  // namespace

void add_run_command(CLI::App& app, Action& action) {
  auto options = std::make_shared<RunOptions>();
  CLI::App* command = app.add_subcommand("run", "Compute a scene and write its record");
  command->add_option("scene", options->scene_path, "Scene file (YAML)");
  command->add_option("--record", options->record_path,
                      "Record file to write; default: the scene's name with .h5, in the current folder");
  command->add_option("--threads", options->threads, "Threads; default: the scene's, else one per processor")
      ->check(CLI::Range(1, 4096));
  command
      ->add_option("--schedule", options->schedule, "Order in which rows are visited; the result is the same")
      ->check(CLI::IsMember({"plain", "fused", "tiles"}));
  command
      ->add_option(
          "--tiles", options->tiles,
          "Tile size of the tiled schedule: rows along x, rows along y, steps; default: the scene's, else "
          "what was fastest before, else found by trying")
      ->expected(3)
      ->check(CLI::Range(1, 100000));
  command->add_flag("--no-pin", options->no_pin, "Let the system move threads between processors");
  command->add_flag("--xdmf", options->xdmf,
                    "Also write an XDMF file beside the record, for general viewers");
  command->add_flag("--force", options->force, "Replace an existing record, once the new one is whole");
  command->add_flag("--tables", options->tables, "Print the tables at the end, as 'wanewall tables' does");
  CLI::Option* witness =
      command
          ->add_option(
              "--witness", options->witness_faces,
              "Then run the scene again behind a much thicker shell, into RECORD_witness.h5, and print "
              "what the shell changed; FACES such as x-,z+ exchanges these only, at less cost")
          ->expected(0, 1)
          ->type_name("[FACES]");
  command->add_flag("--quiet", options->quiet, "Say nothing unless something is wrong");
  command->footer(
      "Ctrl-C ends the run after the few steps in hand and keeps what was computed (exit code 5); a second "
      "Ctrl-C ends "
      "at once\n"
      "and keeps nothing.\n\n"
      "Example:\n"
      "  wanewall run drum.yaml --record night/drum.h5 --threads 8 --xdmf\n"
      "  wanewall run drum.yaml --witness            how far the shell can be trusted, for all faces\n"
      "  wanewall run drum.yaml --witness z-         for the face at the bottom");
  command->callback([options, witness, &action] {
    options->witness = witness->count() > 0;
    // `run --witness SCENE`: the option's value is optional, and a scene is no list of faces.
    if (options->scene_path.empty() && !names_faces(options->witness_faces))
      std::swap(options->scene_path, options->witness_faces);
    if (options->scene_path.empty()) throw CLI::RequiredError("scene");
    action = [options] { return run_scene(*options); };
  });
}

}  // namespace wanewall
