// `wanewall speed`: how fast this machine advances fields, beside the loop that everybody writes first.
#include <fmt/format.h>
#include <omp.h>
#include <yaml-cpp/yaml.h>

#include <iostream>
#include <memory>

#include "io/atomic_file.hpp"
#include "io/commands.hpp"
#include "io/picture.hpp"
#include "io/provenance.hpp"
#include "io/speed_bench.hpp"
#include "io/terminal.hpp"

namespace wanewall {
namespace {

struct Options {
  SpeedSetting setting;
  std::vector<int> tiles;
  std::vector<int> sizes;
  std::string json_path, picture_path;
};

std::string shape_text(const TileShape& shape) {
  if (shape.steps == 1) return "none, the fused sweep is faster";
  return fmt::format("{} x {} rows and {} steps", shape.x_rows, shape.y_rows, shape.steps);
}

std::string result_text(const SpeedResult& r) {
  const SpeedSetting& s = r.setting;
  const double in_cache = r.in_cache.median() * s.threads;
  std::string text = fmt::format(
      "processor: {}, {} threads, {} code, single precision unless said otherwise\n"
      "cube of {} cells along each edge, all of them counted; {} rounds of {} steps in turn\n"
      "full scene: Moebius shell of 10 cells on six faces, oblique plane wave, ball, block and rod, audit at "
      "9 "
      "frequencies\n"
      "tiles: bare cube {}, full scene {}\n"
      "checked: textbook loop and solver agree to {:.1e}, plain sweeps and tiles of the full scene bit for "
      "bit\n\n",
      provenance_of_program().processor, s.threads, r.vector_code, s.cells, s.rounds, s.steps,
      shape_text(r.bare_tiles), shape_text(r.scene_tiles), r.largest_difference);
  text += "| memory    | median [GB/s] | least | most |\n| --------- | ------------: | ----: | ---: |\n";
  for (const SpeedRow& row : r.memory)
    text += fmt::format("| {:<9} | {:13.1f} | {:5.1f} | {:4.1f} |\n", row.name, row.median(), row.least(),
                        row.most());
  text += fmt::format(
      "\none sweep a step through the memory, 48 bytes a cell, could do {:.3f} Gcell/s; one core "
      "in its cache does {:.3f}, all of them {:.3f}\n\n",
      r.one_sweep_limit(), r.in_cache.median(), in_cache);
  text += fmt::format(
      "| {:<35} | median [Gcell/s] | least | most  | bytes per cell-step | of one-sweep limit | of "
      "in-cache rate | over textbook |\n",
      "loop");
  text += fmt::format(
      "| {:-<35} | ---------------: | ----: | ----: | ------------------: | -----------------: | "
      "---------------: | ------------: |\n",
      "");
  for (const SpeedRow& row : r.loops)
    text +=
        fmt::format("| {:<35} | {:16.3f} | {:.3f} | {:.3f} | {:>19} | {:17.0f}% | {:15.0f}% | {:13.2f} |\n",
                    row.name, row.median(), row.least(), row.most(),
                    row.bytes_per_cell_step > 0.0 ? fmt::format("{:.1f}", row.bytes_per_cell_step) : "",
                    100.0 * row.median() / r.one_sweep_limit(), 100.0 * row.median() / in_cache,
                    row.median() / r.loops[0].median());
  text += fmt::format(
      "\nbytes per cell-step: what the fields must move through the memory at the least\n"
      "tiles over fused, bare cube: {:.2f}; full scene over bare cube, tiles: {:.2f}\n",
      r.loop("tiles").median() / r.loop("fused").median(),
      r.loop("full").median() / r.loop("tiles").median());
  if (s.more)
    text += fmt::format(
        "{} threads over one, full scene: {:.2f}; double over single precision: {:.2f}; moebius over cfs_pml "
        "shell: "
        "{:.2f}\n",
        s.threads, r.loop("full").median() / r.loop("full_one_thread").median(),
        r.loop("full_double").median() / r.loop("full").median(),
        r.loop("moebius").median() / r.loop("cfs_pml").median());
  text += fmt::format("memory of the full scene: {:.1f} bytes per cell (fields, layers, media)\n",
                      r.bytes_per_cell);
  return text;
}

void emit_row(YAML::Emitter& out, const SpeedRow& row) {
  out << YAML::BeginMap << YAML::Key << "id" << YAML::Value << row.id << YAML::Key << "name" << YAML::Value
      << row.name << YAML::Key << "median" << YAML::Value << row.median() << YAML::Key << "rounds"
      << YAML::Value << row.rates << YAML::EndMap;
}

std::string json(const std::vector<SpeedResult>& results) {
  YAML::Emitter out;
  out << YAML::Flow << YAML::DoubleQuoted << YAML::BeginSeq;
  for (const SpeedResult& r : results) {
    const auto shape = [](const TileShape& t) { return std::vector<int>{t.x_rows, t.y_rows, t.steps}; };
    out << YAML::BeginMap << YAML::Key << "program" << YAML::Value << version_text() << YAML::Key
        << "processor" << YAML::Value << provenance_of_program().processor << YAML::Key << "threads"
        << YAML::Value << r.setting.threads << YAML::Key << "vector_code" << YAML::Value << r.vector_code
        << YAML::Key << "cells" << YAML::Value << r.setting.cells << YAML::Key << "steps" << YAML::Value
        << r.setting.steps << YAML::Key << "bare_tiles" << YAML::Value << shape(r.bare_tiles) << YAML::Key
        << "scene_tiles" << YAML::Value << shape(r.scene_tiles) << YAML::Key << "bytes_per_cell"
        << YAML::Value << r.bytes_per_cell;
    out << YAML::Key << "memory_gb_per_s" << YAML::Value << YAML::BeginSeq;
    for (const SpeedRow& row : r.memory) emit_row(out, row);
    out << YAML::EndSeq << YAML::Key << "loops_gcell_per_s" << YAML::Value << YAML::BeginSeq;
    emit_row(out, r.in_cache);
    for (const SpeedRow& row : r.loops) emit_row(out, row);
    out << YAML::EndSeq << YAML::EndMap;
  }
  out << YAML::EndSeq;
  return std::string(out.c_str()) + "\n";
}

LineChart chart_of(const std::vector<SpeedResult>& results) {
  LineChart chart;
  chart.title = fmt::format("{}, {} threads", provenance_of_program().processor, results[0].setting.threads);
  chart.x_label = "cells along an edge";
  chart.y_label = "rate [Gcell/s]";
  double most = 0.0;
  for (const SpeedRow& row : results[0].loops) {
    Curve curve{row.name, {}, {}};
    for (const SpeedResult& result : results) {
      curve.x.push_back(result.setting.cells);
      curve.y.push_back(result.loop(row.id).median());
      most = std::max(most, curve.y.back());
    }
    chart.curves.push_back(std::move(curve));
  }
  chart.y_range = {0.0, 1.15 * most};
  return chart;
}

ExitCode measure(Options options) {
  SpeedSetting& setting = options.setting;
  if (setting.threads == 0) setting.threads = omp_get_num_procs();
  if (!options.tiles.empty()) setting.tiles = TileShape{options.tiles[0], options.tiles[1], options.tiles[2]};
  std::vector<int> sizes = options.sizes;
  if (sizes.empty() && options.picture_path.empty()) sizes = {setting.cells};
  if (sizes.empty()) sizes = {48, 64, 96, 128, 160, 200, 240, 320, 400, 480};
  std::vector<SpeedResult> results;
  for (const int cells : sizes) {
    setting.cells = cells;
    results.push_back(measure_speed(setting));
    std::cout << (results.size() > 1 ? "\n" : "") << result_text(results.back()) << std::flush;
  }
  if (!options.json_path.empty()) write_atomically(options.json_path, json(results));
  if (!options.picture_path.empty()) draw_svg(chart_of(results), options.picture_path);
  return ExitCode::done;
}

}  // namespace

void add_speed_command(CLI::App& app, Action& action) {
  auto options = std::make_shared<Options>();
  SpeedSetting& setting = options->setting;
  setting.threads = 0;
  CLI::App* command =
      app.add_subcommand("speed", "Measure this machine against the loop that everybody writes first");
  const CLI::Range sizes(48, 1024);
  command->add_option("--cells", setting.cells, "Cells along each edge of the cube, its shell included")
      ->check(sizes)
      ->capture_default_str();
  command->add_option("--sizes", options->sizes, "Several cubes, one after the other")->check(sizes);
  command->add_option("--steps", setting.steps, "Steps in a round")
      ->check(CLI::Range(1, 10000))
      ->capture_default_str();
  command->add_option("--rounds", setting.rounds, "Rounds that count")
      ->check(CLI::Range(1, 100))
      ->capture_default_str();
  command->add_option("--threads", setting.threads, "Threads; 0: one per processor")
      ->check(CLI::Range(0, 1024));
  command
      ->add_option("--tiles", options->tiles, "Rows along x, rows along y, steps; default: found by trying")
      ->expected(3)
      ->check(CLI::Range(1, 100000));
  command->add_flag("--more", setting.more, "Also one thread, double precision, and shells without a scene");
  command->add_option("--json", options->json_path, "Also write every round's figures into this file");
  command->add_option(
      "--picture", options->picture_path,
      "Draw the rates over the size of the cube, as SVG; cubes from 48 to 480 unless --sizes says "
      "otherwise");
  command->footer(
      "Needs about 220 bytes of memory per cell, 14 GB at 400 cells; with --more 380 bytes.\n\n"
      "Examples:\n"
      "  wanewall speed --cells 200 --rounds 3\n"
      "  wanewall speed --picture rates.svg --json rates.json");
  command->callback([options, &action] { action = [options] { return measure(*options); }; });
}

}  // namespace wanewall
