// What is kept of the run.
#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <map>

#include "io/scene/read.hpp"

namespace wanewall::scene {
namespace {

constexpr double rounding_cells = 1e-6;  ///< by which a position may miss the clear volume
constexpr std::size_t most_points = 10000;
constexpr int least_audit_depth = 4;  ///< cells; the audit looks at three planes

std::vector<Component> components_of(const std::vector<std::string>& words) {
  std::vector<Component> list;
  for (Component c : all_components) {
    const std::string_view own = name_of(c);
    const bool wanted = std::any_of(words.begin(), words.end(), [&](const std::string& word) {
      return word == own || word == own.substr(0, 1);
    });
    if (wanted) list.push_back(c);
  }
  return list;
}

/// Moves a position that misses the clear volume by rounding onto its end; rejects one that misses it by
/// more.
Vec3 inside(const Problem& problem, const Vec3& point_m, const std::string& file, Place place,
            const std::string& path) {
  const Bounds clear = clear_bounds(problem.lattice, 0.0);
  if (!lies_in(clear_bounds(problem.lattice, rounding_cells), point_m))
    reject(file,
           {place,
            fmt::format("{} = [{}, {}, {}] is not allowed", path, format_quantity(point_m[0], Family::length),
                        format_quantity(point_m[1], Family::length),
                        format_quantity(point_m[2], Family::length)),
            "positions in the clear volume: " + bounds_text(clear), "move it or widen clear_volume"});
  Vec3 moved = point_m;
  for (std::size_t i = 0; i < 3; ++i) moved[i] = std::clamp(moved[i], clear.lo_m[i], clear.hi_m[i]);
  return moved;
}

SnapshotRequest read_snapshot(Cursor& block, const std::string& name) {
  SnapshotRequest request;
  request.name = name;
  request.components = components_of(block.words("fields"));
  request.every = std::lround(block.quantity("every"));
  request.stride = static_cast<int>(block.whole("stride"));
  return request;
}

SnapshotRequest read_plane(Cursor& block, const std::string& name, const Scene& scene) {
  SnapshotRequest request = read_snapshot(block, name);
  const Bounds clear = clear_bounds(scene.problem.lattice, 0.0);
  const Bounds reach = clear_bounds(scene.problem.lattice, rounding_cells);
  for (Axis a : all_axes) {
    const std::string_view key = name_of(a);
    if (!block.has(key)) continue;
    const auto i = static_cast<std::size_t>(index_of(a));
    const double at_m = block.quantity(key);
    if (!(reach.lo_m[i] <= at_m && at_m <= reach.hi_m[i]))
      block.reject(key, "positions in the clear volume: " + bounds_text(clear),
                   "move it or widen clear_volume");
    request.normal = a;
    request.lo_m = clear.lo_m;
    request.hi_m = clear.hi_m;
    request.lo_m[i] = request.hi_m[i] = std::clamp(at_m, clear.lo_m[i], clear.hi_m[i]);
  }
  return request;
}

SnapshotRequest read_volume(Cursor& block, const std::string& name, const Scene& scene) {
  SnapshotRequest request = read_snapshot(block, name);
  const Vec3 from =
      inside(scene.problem, block.vec3("from"), scene.file, block.place("from"), block.path("from"));
  const Vec3 to = inside(scene.problem, block.vec3("to"), scene.file, block.place("to"), block.path("to"));
  for (std::size_t i = 0; i < 3; ++i) {
    request.lo_m[i] = std::min(from[i], to[i]);
    request.hi_m[i] = std::max(from[i], to[i]);
  }
  return request;
}

std::vector<double> spread_over_band(long count, double lo_hz, double hi_hz) {
  if (count == 1) return {0.5 * (lo_hz + hi_hz)};
  std::vector<double> list;
  for (long n = 0; n < count; ++n)
    list.push_back(lo_hz + (hi_hz - lo_hz) * static_cast<double>(n) / static_cast<double>(count - 1));
  return list;
}

AuditRequest read_audit(Cursor& record, const Scene& scene) {
  AuditRequest audit;
  if (record.kind("shell_audit") == Node::Kind::scalar) {
    record.word("shell_audit");  // off
    return audit;
  }
  Cursor block = record.block("shell_audit");
  if (block.has("faces")) {
    for (const std::string& word : block.words("faces"))
      for (Side side : all_sides)
        if (word == name_of(side)) {
          if (!absorbs(scene.problem.face(side).kind))
            block.reject_text("faces",
                              fmt::format("{}: {} is of kind {}", block.path("faces"), word,
                                          name_of(scene.problem.face(side).kind)),
                              "faces that absorb", "remove it from the list");
          audit.faces[static_cast<std::size_t>(index_of(side))] = true;
        }
  } else {
    std::string all;
    for (Side side : all_sides) {
      const bool wanted = absorbs(scene.problem.face(side).kind);
      audit.faces[static_cast<std::size_t>(index_of(side))] = wanted;
      if (wanted) all += fmt::format("{}{}", all.empty() ? "" : ", ", name_of(side));
    }
    block.use("faces", "[" + all + "]");
  }
  for (Side side : all_sides) {
    const int depth = scene.problem.lattice.clear_cells(axis_of(side)).size();
    if (!audit.faces[static_cast<std::size_t>(index_of(side))] || depth >= least_audit_depth) continue;
    block.reject_text(
        "faces",
        fmt::format("{} cannot be audited: the clear volume is {} cells deep there", name_of(side), depth),
        fmt::format("at least {} cells in front of an audited face", least_audit_depth),
        "widen clear_volume, list the other faces in shell_audit.faces, or write `shell_audit: off`");
  }
  if (block.has("sample_every")) audit.sample_every = static_cast<int>(block.quantity("sample_every"));
  if (block.kind("frequencies") == Node::Kind::list) {
    audit.frequencies_hz = block.quantities("frequencies");
    std::sort(audit.frequencies_hz.begin(), audit.frequencies_hz.end());
    if (std::adjacent_find(audit.frequencies_hz.begin(), audit.frequencies_hz.end()) !=
        audit.frequencies_hz.end())
      block.reject("frequencies", "frequencies that are all different", "remove the repeated one");
    const double nyquist_hz = 0.5 / scene.problem.lattice.dt_s;
    if (audit.frequencies_hz.back() >= nyquist_hz)
      block.reject("frequencies",
                   "frequencies below " + format_quantity(nyquist_hz, Family::frequency) +
                       ", half of one over the time step",
                   "choose frequencies in or near the band");
  } else {
    audit.frequencies_hz = spread_over_band(block.whole("frequencies"), scene.band_lo_hz, scene.band_hi_hz);
  }
  const bool any = std::any_of(audit.faces.begin(), audit.faces.end(), [](bool wanted) { return wanted; });
  if (!any) audit.frequencies_hz.clear();
  return audit;
}

}  // namespace

void read_record(Cursor& root, Scene& scene) {
  Recording& recording = scene.problem.recording;
  Cursor record = root.block("record");
  std::map<std::string, std::string> names;  // of planes and volumes, and where they stand
  for (const auto& [name, position_m, place] : record.named_positions("points"))
    recording.points.push_back(
        {name, inside(scene.problem, position_m, scene.file, place, "record.points." + name)});
  if (recording.points.size() > most_points)
    record.reject_text("points", fmt::format("record.points has {} points", recording.points.size()),
                       fmt::format("at most {} points", most_points), "record a plane or a volume instead");
  for (auto& [name, block] : record.named_blocks("planes")) {
    names[name] = "planes";
    recording.snapshots.push_back(read_plane(block, name, scene));
  }
  for (auto& [name, block] : record.named_blocks("volumes")) {
    if (names.count(name) != 0)
      reject(scene.file, {block.place(), fmt::format("{} has the name of a plane", block.path()),
                          "names that are all different among planes and volumes", "rename one of the two"});
    recording.snapshots.push_back(read_volume(block, name, scene));
  }
  recording.energy_every = std::lround(record.quantity("energy_every"));
  recording.audit = read_audit(record, scene);
}

}  // namespace wanewall::scene
