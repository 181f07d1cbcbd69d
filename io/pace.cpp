#include "io/pace.hpp"

#include <fmt/format.h>
#include <omp.h>
#include <yaml-cpp/yaml.h>

#include <cstdlib>
#include <exception>
#include <filesystem>

#include "io/atomic_file.hpp"
#include "io/provenance.hpp"

namespace wanewall {
namespace {

namespace fs = std::filesystem;

YAML::Node load(const std::string& path) {
  if (!fs::exists(path)) return YAML::Node(YAML::NodeType::Map);
  YAML::Node node = YAML::LoadFile(path);
  return node.IsMap() ? node : YAML::Node(YAML::NodeType::Map);
}

struct Nobody : Sink {
  void take(Snapshot) override {}
};

/// Ends a run after a while and notes how far it was half way.
class HalfTime : public Monitor {
 public:
  explicit HalfTime(double seconds) : seconds_(seconds) {}
  bool go_on(const Progress& progress) override {
    if (progress.seconds < 0.5 * seconds_ || half_.step == 0) half_ = progress;
    end_ = progress;
    return progress.seconds < seconds_;
  }
  /// Steps per second of the second half; of all when there is none.
  double steps_per_second() const {
    const long steps = end_.step - half_.step;
    if (steps > 0) return static_cast<double>(steps) / (end_.seconds - half_.seconds);
    return end_.seconds > 0.0 ? static_cast<double>(end_.step) / end_.seconds : 0.0;
  }

 private:
  double seconds_;
  Progress half_, end_;
};

}  // namespace

std::string pace_key(const Problem& problem) {
  const Index3 n = problem.lattice.cells();
  std::string key =
      fmt::format("{} | {} threads | {} | {} x {} x {} |", provenance_of_program().processor,
                  problem.threads > 0 ? problem.threads : omp_get_num_procs(),
                  problem.precision == Precision::single_precision ? "single" : "double", n[0], n[1], n[2]);
  for (Side side : all_sides)
    key += fmt::format(" {} {}", name_of(problem.face(side).kind), problem.face(side).cells());
  return key + fmt::format(" | {} | {} frequencies", problem.plane_wave ? "plane wave" : "no plane wave",
                           problem.recording.audit.frequencies_hz.size());
}

std::string pace_file() {
  const char* cache = std::getenv("XDG_CACHE_HOME");
  if (cache && *cache) return std::string(cache) + "/wanewall/pace.yaml";
  const char* home = std::getenv("HOME");
  return home && *home ? std::string(home) + "/.cache/wanewall/pace.yaml" : std::string();
}

std::optional<Pace> known_pace(const Problem& problem) {
  const std::string path = pace_file();
  if (path.empty()) return {};
  try {
    const YAML::Node note = load(path)[pace_key(problem)];
    if (!note || !note.IsMap()) return {};
    const auto tiles = note["tiles"].as<std::vector<int>>();
    const Pace pace{{tiles.at(0), tiles.at(1), tiles.at(2)}, note["cells_per_second"].as<double>()};
    const bool sound = pace.tiles.x_rows > 0 && pace.tiles.y_rows > 0 && pace.tiles.steps > 0 &&
                       pace.tiles.steps <= most_tile_steps && pace.cells_per_second > 0.0;
    return sound ? std::optional(pace) : std::nullopt;
  } catch (const std::exception&) {
    return {};
  }
}

void remember_pace(const Problem& problem, const Pace& pace) {
  const std::string path = pace_file();
  if (path.empty()) return;
  try {
    fs::create_directories(fs::path(path).parent_path());
    YAML::Node notes(YAML::NodeType::Map);
    try {
      notes = load(path);
    } catch (const YAML::Exception&) {
      // A file that nobody can read is begun again.
    }
    YAML::Node note;
    note["tiles"] = std::vector<int>{pace.tiles.x_rows, pace.tiles.y_rows, pace.tiles.steps};
    note["tiles"].SetStyle(YAML::EmitterStyle::Flow);
    note["cells_per_second"] = pace.cells_per_second;
    notes[pace_key(problem)] = note;
    YAML::Emitter out;
    out << notes;
    write_atomically(path, std::string(out.c_str()) + "\n");
  } catch (const std::exception&) {
  }
}

Pace measure_pace(Problem problem, double seconds) {
  Nobody nobody;
  HalfTime half_time(seconds);
  const RunResult result = run(problem, nobody, half_time);
  return {result.tiles, half_time.steps_per_second() * problem.lattice.n_cells()};
}

}  // namespace wanewall
