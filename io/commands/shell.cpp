// wanewall shell: what the shell will reflect, and what it should be made of.
#include <fmt/format.h>

#include <chrono>
#include <cmath>
#include <iostream>
#include <memory>
#include <string>
#include <vector>

#include "geometry/constants.hpp"
#include "io/atomic_file.hpp"
#include "io/commands.hpp"
#include "io/picture.hpp"
#include "io/quantity.hpp"
#include "io/scene.hpp"
#include "io/shell_document.hpp"
#include "io/terminal.hpp"

namespace wanewall {
namespace {

constexpr double degree = pi / 180.0;

struct PredictOptions {
  std::string scene_path, csv_path, picture_path;
};

struct DesignOptions {
  std::string scene_path, plane_waves;
  bool without_trade = false;
};

PredictionGrid grid_of(const Scene& scene, const std::vector<double>& angles_deg, int frequencies) {
  PredictionGrid grid;
  for (int n = 0; n < frequencies; ++n)
    grid.frequencies_hz.push_back(scene.band_lo_hz +
                                  (scene.band_hi_hz - scene.band_lo_hz) * n / (frequencies - 1));
  for (const double angle : angles_deg) grid.angles_rad.push_back(angle * degree);
  grid.decays_per_cell = {0.05, 0.1, 0.2, 0.5, 1.0, 2.0};
  return grid;
}

ExitCode predict_command(const PredictOptions& options) {
  const Scene scene = read_scene(options.scene_path);
  const std::vector<double> coarse{0, 15, 30, 45, 60, 70, 75, 80, 85, 89};
  std::vector<double> fine;
  for (int n = 0; n <= 89; ++n) fine.push_back(n);
  const auto begin = std::chrono::steady_clock::now();
  const std::vector<FacePrediction> dense = predict_shell(scene, grid_of(scene, fine, 5));
  const std::chrono::duration<double, std::milli> took = std::chrono::steady_clock::now() - begin;
  std::size_t waves = 0;
  for (const FacePrediction& p : dense) waves += p.waves.size();
  std::cout << prediction_markdown(scene, predict_shell(scene, grid_of(scene, coarse, 5)),
                                   waves > 0 ? 1e3 * took.count() / static_cast<double>(waves) : 0.0);
  if (!options.csv_path.empty()) {
    write_atomically(options.csv_path, to_csv(prediction_table(scene, dense)));
    warn("wrote " + options.csv_path + "\n");
  }
  if (!options.picture_path.empty()) {
    draw_svg(prediction_chart(scene, dense), options.picture_path);
    warn("wrote " + options.picture_path + "\n");
  }
  return ExitCode::done;
}

ExitCode design_command(const DesignOptions& options) {
  const Scene scene = read_scene(options.scene_path);
  if (options.plane_waves.empty()) {
    std::cout << design_markdown(scene, !options.without_trade);
    return ExitCode::done;
  }
  const ParsedQuantity angle = parse_quantity(options.plane_waves, Family::angle);
  if (!angle || angle.value < 0.0 || angle.value > 89.0 * degree) {
    warn(fmt::format(
        "wanewall: --plane-waves \"{}\" is not allowed\n  allowed: an angle from 0 deg to 89 deg with "
        "its unit\n  next: wanewall shell design --help\n",
        options.plane_waves));
    return ExitCode::command_line;
  }
  constexpr double shortest_cells = 10.0, longest_cells = 100.0;
  std::cout << plane_wave_design_markdown(scene, angle.value, shortest_cells, longest_cells);
  return ExitCode::done;
}

}  // namespace

void add_shell_command(CLI::App& app, Action& action) {
  CLI::App* shell = app.add_subcommand("shell", "Predict what a scene's shell reflects, or design it");
  shell->require_subcommand(1);
  shell->footer(
      "Examples:\n"
      "  wanewall shell predict drum.yaml\n"
      "  wanewall shell design drum.yaml");

  auto predict_options = std::make_shared<PredictOptions>();
  CLI::App* predict = shell->add_subcommand("predict", "The exact reflection of every face, before any run");
  predict->add_option("scene", predict_options->scene_path, "Scene file (YAML)")->required();
  predict->add_option("--csv", predict_options->csv_path, "Also write every degree into this CSV file");
  predict->add_option("--picture", predict_options->picture_path, "Also draw this SVG file (needs gnuplot)");
  predict->footer(
      "Example:\n"
      "  wanewall shell predict drum.yaml --csv shell.csv --picture shell.svg");
  predict->callback([predict_options, &action] {
    action = [predict_options] { return predict_command(*predict_options); };
  });

  auto design_options = std::make_shared<DesignOptions>();
  CLI::App* design = shell->add_subcommand(
      "design", "What the layers are designed for, cells against error, and the tables");
  design->add_option("scene", design_options->scene_path, "Scene file (YAML)")->required();
  design->add_option("--plane-waves", design_options->plane_waves,
                     "Design for plane waves from 0 to this angle only, e.g. \"60 deg\"");
  design->add_flag("--no-trade", design_options->without_trade, "Leave out the table of cells against error");
  design->footer(
      "Examples:\n"
      "  wanewall shell design drum.yaml\n"
      "  wanewall shell design drum.yaml --plane-waves \"60 deg\"");
  design->callback(
      [design_options, &action] { action = [design_options] { return design_command(*design_options); }; });
}

}  // namespace wanewall
