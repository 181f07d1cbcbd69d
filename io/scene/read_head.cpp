// Title, band, media, stop rule: the parts that need no lattice.
#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <filesystem>

#include "io/scene/read.hpp"

namespace wanewall::scene {

void read_head(Cursor& root, Scene& scene) {
  if (root.has("title")) {
    scene.title = root.text("title");
  } else {
    scene.title = std::filesystem::path(scene.file).filename().string();
    root.use("title", scene.title);
  }
  const auto [lo_hz, hi_hz] = root.pair("band");
  if (!(lo_hz < hi_hz)) root.reject("band", "two frequencies, the lower one first", "swap or move the two");
  scene.band_lo_hz = lo_hz;
  scene.band_hi_hz = hi_hz;
  scene.problem.precision =
      root.word("precision") == "single" ? Precision::single_precision : Precision::double_precision;
  Cursor run = root.block("run");
  scene.problem.threads = static_cast<int>(run.whole("threads"));
  scene.problem.schedule = schedule_named(run.word("schedule"));
  scene.problem.pin_threads = run.yes("pin");
  if (run.has("tiles")) {
    const std::vector<double> tiles = run.quantities("tiles");
    if (tiles[2] > most_tile_steps)
      run.reject("tiles", fmt::format("at most {} steps", most_tile_steps), "take fewer steps");
    scene.problem.tiles = {static_cast<int>(tiles[0]), static_cast<int>(tiles[1]),
                           static_cast<int>(tiles[2])};
  }
}

void read_media(Cursor& root, Scene& scene) {
  std::vector<Medium>& media = scene.problem.media;
  media.push_back({});
  media.back().name = "vacuum";
  for (auto& [name, block] : root.named_blocks("media")) {
    if (name == "vacuum")
      reject(scene.file, {block.place(), "media.vacuum is not allowed",
                          "names other than vacuum, which is always there", "choose another name"});
    Medium medium;
    medium.name = name;
    medium.perfect_electric = block.yes("perfect_conductor");
    medium.perfect_magnetic = block.yes("perfect_magnetic_conductor");
    if (medium.perfect_electric && medium.perfect_magnetic)
      block.reject_text(
          "perfect_magnetic_conductor", fmt::format("{} is both kinds of perfect conductor", block.path()),
          "true for one of perfect_conductor, perfect_magnetic_conductor", "remove one of the two");
    if (medium.is_perfect()) {
      for (const char* key : {"permittivity", "permeability", "conductivity", "magnetic_conductivity"})
        if (block.has(key))
          block.reject_text(key, fmt::format("{} is given for a perfect conductor", block.path(key)),
                            "no other key beside a perfect conductor", "remove it");
    } else {
      medium.permittivity_rel = block.number("permittivity");
      medium.permeability_rel = block.number("permeability");
      medium.conductivity_s_per_m = block.quantity("conductivity");
      medium.magnetic_conductivity_ohm_per_m = block.quantity("magnetic_conductivity");
    }
    media.push_back(medium);
  }
  scene.problem.background = medium_index(scene, root, "background", root.word("background"));
  if (media[static_cast<std::size_t>(scene.problem.background)].is_perfect())
    root.reject("background", "a medium that is not a perfect conductor",
                "take vacuum and paint the conductor");
}

int medium_index(const Scene& scene, const Cursor& at, std::string_view key, const std::string& name) {
  std::vector<std::string> names;
  for (const Medium& medium : scene.problem.media) {
    if (medium.name == name) return static_cast<int>(names.size());
    names.push_back(medium.name);
  }
  const std::string near = nearest(name, names);
  at.reject(key, "a medium of the scene: " + joined(names),
            near.empty() ? fmt::format("add {} under `media`", shown(name))
                         : fmt::format("did you mean `{}`?", near));
}

void read_stop(Cursor& root, Scene& scene) {
  constexpr double most_steps = 1e9;
  Problem& problem = scene.problem;
  Cursor stop = root.block("stop");
  problem.stop.at_s = stop.quantity("at");
  if (stop.has("when_energy_below")) problem.stop.energy_below_db = stop.quantity("when_energy_below");
  const double steps = problem.stop.at_s / problem.lattice.dt_s;
  if (steps > most_steps)
    stop.reject("at",
                fmt::format("at most {} steps of {}, that is {}", format_number(most_steps),
                            format_quantity(problem.lattice.dt_s, Family::time),
                            format_quantity(most_steps * problem.lattice.dt_s, Family::time)),
                "choose an earlier time");
  if (steps < 1.0)
    stop.reject("at",
                fmt::format("at least one step of {}", format_quantity(problem.lattice.dt_s, Family::time)),
                "choose a later time");
}

Bounds clear_bounds(const Lattice& lattice, double slack_cells) {
  Bounds bounds;
  for (Axis a : all_axes) {
    const auto i = static_cast<std::size_t>(index_of(a));
    const MeshLines& lines = lattice.along(a);
    const IndexRange clear = lattice.clear_cells(a);
    bounds.lo_m[i] = lines.node_m(clear.begin) - slack_cells * lines.cell_m(clear.begin);
    bounds.hi_m[i] = lines.node_m(clear.end) + slack_cells * lines.cell_m(clear.end - 1);
  }
  return bounds;
}

bool lies_in(const Bounds& bounds, const Vec3& point_m) {
  for (std::size_t i = 0; i < 3; ++i)
    if (!(bounds.lo_m[i] <= point_m[i] && point_m[i] <= bounds.hi_m[i])) return false;
  return true;
}

std::string bounds_text(const Bounds& bounds) {
  std::string text;
  for (Axis a : all_axes) {
    const auto i = static_cast<std::size_t>(index_of(a));
    text += fmt::format("{}{} from {} to {}", i == 0 ? "" : ", ", name_of(a),
                        format_quantity(bounds.lo_m[i], Family::length),
                        format_quantity(bounds.hi_m[i], Family::length));
  }
  return text;
}

}  // namespace wanewall::scene
