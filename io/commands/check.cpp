// wanewall check: what a scene will build, and whether it can work.
#include <chrono>
#include <iostream>
#include <memory>
#include <string>

#include "io/commands.hpp"
#include "io/memory_guard.hpp"
#include "io/pace.hpp"
#include "io/provenance.hpp"
#include "io/scene.hpp"
#include "io/scene/build_report.hpp"

namespace wanewall {
namespace {

struct CheckOptions {
  std::string scene_path;
  bool values = false;
  bool time = false;
  bool schema = false;
  bool reference = false;
};

ExitCode check(const CheckOptions& options) {
  if (options.schema) {
    std::cout << scene_schema_json();
    return ExitCode::done;
  }
  if (options.reference) {
    std::cout << scene_reference_markdown();
    return ExitCode::done;
  }
  const auto start = std::chrono::steady_clock::now();
  const Scene scene = read_scene(options.scene_path);
  const Footprint footprint = run_footprint(scene.problem);
  scene::ReportOptions report{options.values, machine_memory_bytes()};
  // A run does the same before its first step.
  report.start_seconds = std::chrono::duration<double>(std::chrono::steady_clock::now() - start).count();
  if (options.time) {
    constexpr double for_seconds = 8.0;
    require_memory(footprint);
    const Pace pace = measure_pace(scene.problem, for_seconds);
    remember_pace(scene.problem, pace);
    report.cells_per_second = pace.cells_per_second;
    report.is_measured_now = true;
  } else if (const std::optional<Pace> pace = known_pace(scene.problem)) {
    report.cells_per_second = pace->cells_per_second;
  }
  std::cout << scene::build_report(scene, footprint, report);
  return ExitCode::done;
}

}  // namespace

void add_check_command(CLI::App& app, Action& action) {
  auto options = std::make_shared<CheckOptions>();
  CLI::App* command = app.add_subcommand("check", "Say what a scene will build, and whether it can work");
  CLI::Option* path = command->add_option("scene", options->scene_path, "Scene file (YAML)");
  CLI::Option* values =
      command->add_flag("--values", options->values, "Also list every value used, defaults included");
  command->add_flag("--time", options->time,
                    "March the scene for a few seconds to say how long the run will take; nothing is written "
                    "but a note of the rate in the user's cache folder");
  CLI::Option* schema = command->add_flag("--schema", options->schema,
                                          "Print the JSON Schema of the scene language, for editors");
  CLI::Option* reference =
      command->add_flag("--reference", options->reference, "Print the reference page of the scene language");
  schema->excludes(path)->excludes(values)->excludes(reference);
  reference->excludes(path)->excludes(values);
  command->footer(
      "Without --time nothing is computed and nothing is written. A scene that cannot work ends with exit "
      "code 3.\n\n"
      "Examples:\n"
      "  wanewall check drum.yaml\n"
      "  wanewall check drum.yaml --values\n"
      "  wanewall check --schema > wanewall.schema.json\n"
      "  wanewall check --reference > scene.md");
  command->callback([options, &action] {
    if (options->scene_path.empty() && !options->schema && !options->reference)
      throw CLI::RequiredError("scene");
    action = [options] { return check(*options); };
  });
}

}  // namespace wanewall
