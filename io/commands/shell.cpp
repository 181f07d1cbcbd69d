// wanewall shell: what the shell will reflect, and what it should be made of.
#include <fmt/format.h>

#include <algorithm>
#include <chrono>
#include <cmath>
#include <cstdio>
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
#include "solver/shell/column_run.hpp"

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

struct MeasureOptions {
  std::string scene_path;
  std::vector<double> angles_deg{0.0, 30.0, 60.0, 75.0};
  std::vector<double> cells_per_wavelength{20.0};
};

ExitCode measure_command(const MeasureOptions& options) {
  const Scene scene = read_scene(options.scene_path);
  const Problem& problem = scene.problem;
  fmt::print("# Reflection of single faces, read from the march\n\n");
  fmt::print(
      "One mode of a guide along z that ends in the face's layer, in vacuum, double precision; predicted: "
      "the exact lattice "
      "reflection of the same wave.\nTime step {}.\n\n",
      format_quantity(problem.lattice.dt_s, Family::time, 6));
  fmt::print("| {:<6} | {:<12} | {:>5} | {:>6} | {:>6} | {:<3} | {:>14} | {:>14} | {:>16} |\n", "faces",
             "kind", "cells", "angle", "cells/wl", "pol", "measured [dB]", "predicted [dB]",
             "difference [dB]");
  fmt::print("| {:-<6} | {:-<12} | {:->4}: | {:->5}: | {:->7}: | {:-<3} | {:->13}: | {:->13}: | {:->15}: |\n",
             "", "", "", "", "", "", "", "", "");
  std::vector<Side> done;
  bool any = false;
  for (Side side : all_sides) {
    const Face& face = problem.face(side);
    const double cell_m = problem.lattice.along(axis_of(side)).smallest_cell_m();
    if (!absorbs(face.kind)) continue;
    const auto alike = [&](Side other) {
      return problem.face(other) == face && problem.lattice.along(axis_of(other)).smallest_cell_m() == cell_m;
    };
    if (std::any_of(done.begin(), done.end(), alike)) continue;
    done.push_back(side);
    any = true;
    std::string names;
    for (Side other : all_sides)
      if (alike(other)) names += fmt::format("{}{}", names.empty() ? "" : " ", name_of(other));
    ColumnRequest request;
    request.face = face;
    // Rows lie along z: there a long guide runs fastest, and a layer does not know its axis.
    request.cell_m = cell_m;
    request.across_m = problem.lattice.along(next(axis_of(side))).smallest_cell_m();
    request.dt_s = problem.lattice.dt_s;
    for (const double cells : options.cells_per_wavelength)
      for (const double angle_deg : options.angles_deg)
        for (const Polarisation polarisation : both_polarisations) {
          request.angle_rad = angle_deg * degree;
          request.cells_per_wavelength = cells;
          request.polarisation = polarisation;
          const ColumnReading reading = read_column(request);
          const double measured_db = 20.0 * std::log10(std::abs(reading.reflection));
          const double predicted_db =
              20.0 *
              std::log10(std::abs(face_reflection(face, request.medium, cell_m, reading.dt_s, reading.wave)));
          fmt::print(
              "| {:<6} | {:<12} | {:>5} | {:>6.1f} | {:>8.2f} | {:<3} | {:>14.3f} | {:>14.3f} | {:>16.4f} "
              "|\n",
              names, name_of(face.kind), face.cells(), angle_deg, reading.cells_per_wavelength,
              polarisation == Polarisation::te ? "TE" : "TM", measured_db, predicted_db,
              measured_db - predicted_db);
          std::fflush(stdout);
        }
  }
  if (!any) fmt::print("No face of this scene absorbs.\n");
  return ExitCode::done;
}

}  // namespace

void add_shell_command(CLI::App& app, Action& action) {
  CLI::App* shell = app.add_subcommand("shell", "Predict what a scene's shell reflects, or design it");
  shell->require_subcommand(1);
  shell->footer(
      "Examples:\n"
      "  wanewall shell predict drum.yaml\n"
      "  wanewall shell design drum.yaml\n"
      "  wanewall shell measure drum.yaml");

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

  auto measure_options = std::make_shared<MeasureOptions>();
  CLI::App* measure =
      shell->add_subcommand("measure", "March single waves into every face and compare with the prediction");
  measure->add_option("scene", measure_options->scene_path, "Scene file (YAML)")->required();
  measure->add_option("--angles", measure_options->angles_deg, "Angles of incidence in degrees, 0 to 85")
      ->check(CLI::Range(0.0, 85.0))
      ->capture_default_str();
  measure
      ->add_option("--cells-per-wavelength", measure_options->cells_per_wavelength,
                   "Cells per wavelength in vacuum; the nearest that fits a guide is used")
      ->check(CLI::Range(6.0, 200.0))
      ->capture_default_str();
  measure->footer(
      "Example:\n"
      "  wanewall shell measure drum.yaml --angles 0 45 70 --cells-per-wavelength 12 20");
  measure->callback([measure_options, &action] {
    action = [measure_options] { return measure_command(*measure_options); };
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
