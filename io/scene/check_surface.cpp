// The surface that lets a plane wave in must lie where the wave is known: in one lossless medium, or, at
// normal incidence, in media that depend on z only.
#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "io/scene/checks.hpp"
#include "io/scene/read.hpp"

namespace wanewall::scene {
namespace {

/// Work that a check may take on a group of faces: vertical lines times objects and heights.
constexpr double most_tests = 5e7;
constexpr int nothing_yet = -2;
/// Half cells beyond the surface's ends that must be in the same medium for the wave to enter cleanly.
constexpr int beyond = 3;
constexpr std::size_t heights_at_end = 7;  ///< 2 beyond + 1

/// What stands at one height of the surface: the topmost object (-1: background) and its medium.
struct Seen {
  int object = nothing_yet;
  int medium = 0;
};

class Surface {
 public:
  Surface(const Problem& problem, const PlaneWave& wave)
      : problem_(problem), wave_(wave), lattice_(problem.lattice) {
    tolerance_m_ = 1e-6 * lattice_.along(Axis::z).smallest_cell_m();
    for (Axis a : all_axes)
      cell_m_[static_cast<std::size_t>(index_of(a))] = lattice_.along(a).largest_cell_m();
    // Heights in half cells.
    first_ = 2 * wave.box_lo[2] - beyond;
    seen_.assign(2 * static_cast<std::size_t>(wave.box_hi[2] - wave.box_lo[2] + beyond) + 1, {});
    for (std::size_t n = 0; n < problem.objects.size(); ++n)
      if (may_touch(bounds_of(problem.objects[n].shape))) near_.push_back(static_cast<int>(n));
  }

  /// Looks at the whole surface. False when two media meet at one height; `culprit` is then an object that
  /// does it.
  bool depends_on_z_only(int& culprit) {
    for (Axis a : {Axis::x, Axis::y})
      for (bool high : {false, true})
        if (exists(side_of(a, high)) && !scan_side(a, high, culprit)) return false;
    return scan_ends(culprit);
  }

  /// The object of a perfect conductor that the surface runs through; -1 when there is none.
  int conductor() const {
    for (const Seen& seen : seen_)
      if (seen.object >= 0 && problem_.media[static_cast<std::size_t>(seen.medium)].is_perfect())
        return seen.object;
    return -1;
  }

  bool is_homogeneous() const {
    int medium = -1;
    for (const Seen& seen : seen_) {
      if (seen.object == nothing_yet) continue;
      if (medium >= 0 && seen.medium != medium) return false;
      medium = seen.medium;
    }
    return true;
  }

  /// Whether the face across z where the wave enters has one medium on both sides of it.
  bool enters_cleanly() const {
    const bool from_below = propagation_of(wave_)[2] > 0.0;
    const std::size_t begin = from_below ? 0 : seen_.size() - heights_at_end;
    for (std::size_t h = begin; h < begin + heights_at_end; ++h)
      if (seen_[h].object != nothing_yet && seen_[h].medium != entry_medium()) return false;
    return true;
  }

  /// Medium where the wave enters: at the end of the surface it reaches first, or anywhere when it travels
  /// across z.
  int entry_medium() const {
    const auto is_seen = [](const Seen& seen) { return seen.object != nothing_yet; };
    if (propagation_of(wave_)[2] > 0.0) return std::find_if(seen_.begin(), seen_.end(), is_seen)->medium;
    return std::find_if(seen_.rbegin(), seen_.rend(), is_seen)->medium;
  }

 private:
  bool exists(Side side) const { return wave_.box_face[static_cast<std::size_t>(index_of(side))]; }

  /// Position in half cells, which may lie beyond the lattice.
  double half_step_m(Axis a, int half) const {
    const MeshLines& lines = lattice_.along(a);
    const int last = 2 * lines.cells();
    if (half < 0) return lines.node_m(0) + 0.5 * half * lines.cell_m(0);
    if (half > last)
      return lines.node_m(lines.cells()) + 0.5 * (half - last) * lines.cell_m(lines.cells() - 1);
    return half % 2 == 0 ? lines.node_m(half / 2) : lines.half_m(half / 2);
  }

  /// False for objects that lie wholly inside the surface or wholly outside it, two cells away.
  bool may_touch(const Bounds& bounds) const {
    bool inside = true;
    for (Axis a : all_axes) {
      const auto i = static_cast<std::size_t>(index_of(a));
      const double cell_m = cell_m_[i];
      const double lo_m = lattice_.along(a).node_m(wave_.box_lo[i]),
                   hi_m = lattice_.along(a).node_m(wave_.box_hi[i]);
      if (bounds.hi_m[i] < lo_m - 2.0 * cell_m || bounds.lo_m[i] > hi_m + 2.0 * cell_m) return false;
      if (exists(side_of(a, false)) && bounds.lo_m[i] < lo_m + 2.0 * cell_m) inside = false;
      if (exists(side_of(a, true)) && bounds.hi_m[i] > hi_m - 2.0 * cell_m) inside = false;
    }
    return !inside;
  }

  double half_cells(Axis a) const {
    const auto i = static_cast<std::size_t>(index_of(a));
    return 2.0 * (wave_.box_hi[i] - wave_.box_lo[i]) + 1.0;
  }
  /// Strides, in half cells, that keep the work on the side faces and on the end faces within bounds.
  int stride_of_sides() const {
    const double lines = 6.0 * (half_cells(Axis::x) + half_cells(Axis::y));
    const double tests = lines * (half_cells(Axis::z) + 1.0) * static_cast<double>(near_.size() + 1);
    return std::max(1, static_cast<int>(std::ceil(tests / most_tests)));
  }
  int stride_of_ends() const {
    const double lines = 2.0 * half_cells(Axis::x) * half_cells(Axis::y);
    const double tests = lines * (2.0 * beyond + 1.0) * static_cast<double>(near_.size() + 1);
    return std::max(1, static_cast<int>(std::ceil(std::sqrt(tests / most_tests))));
  }

  /// Follows one vertical line through the heights [begin, end) and compares it with what the lines before it
  /// saw.
  bool scan_line(double x_m, double y_m, int begin, int end, int& culprit) {
    line_.assign(static_cast<std::size_t>(end - begin), -1);
    for (int n : near_) {
      const Interval inside =
          z_interval(problem_.objects[static_cast<std::size_t>(n)].shape, x_m, y_m, tolerance_m_);
      if (inside.empty()) continue;
      for (int h = begin; h < end; ++h) {
        const double z_m = half_step_m(Axis::z, first_ + h);
        if (inside.lo_m <= z_m && z_m <= inside.hi_m) line_[static_cast<std::size_t>(h - begin)] = n;
      }
    }
    for (int h = begin; h < end; ++h) {
      Seen& seen = seen_[static_cast<std::size_t>(h)];
      const int object = line_[static_cast<std::size_t>(h - begin)];
      const int medium =
          object < 0 ? problem_.background : problem_.objects[static_cast<std::size_t>(object)].medium;
      if (seen.object == nothing_yet) {
        seen = {object, medium};
      } else if (seen.medium != medium) {
        culprit = blame(seen.object, object);
        return false;
      }
    }
    return true;
  }

  /// Of two objects that meet at one height: the one with an end across the wave, else the later one.
  int blame(int first, int second) const {
    for (int n : {std::max(first, second), std::min(first, second)}) {
      if (n < 0) continue;
      const Bounds bounds = bounds_of(problem_.objects[static_cast<std::size_t>(n)].shape);
      if (std::isfinite(bounds.lo_m[0]) || std::isfinite(bounds.hi_m[0]) || std::isfinite(bounds.lo_m[1]) ||
          std::isfinite(bounds.hi_m[1]))
        return n;
    }
    return std::max(first, second);
  }

  /// A face across x or y, on the surface and half a cell to both sides.
  bool scan_side(Axis a, bool high, int& culprit) {
    const int stride = stride_of_sides();
    const Axis across = a == Axis::x ? Axis::y : Axis::x;
    const auto i = static_cast<std::size_t>(index_of(a)), o = static_cast<std::size_t>(index_of(across));
    const int node = 2 * (high ? wave_.box_hi[i] : wave_.box_lo[i]);
    for (int half = node - 1; half <= node + 1; ++half)
      for (int other = 2 * wave_.box_lo[o]; other <= 2 * wave_.box_hi[o]; other += stride) {
        const double at_m = half_step_m(a, half), other_m = half_step_m(across, other);
        const bool along_x = a == Axis::x;
        if (!scan_line(along_x ? at_m : other_m, along_x ? other_m : at_m, beyond,
                       static_cast<int>(seen_.size()) - beyond, culprit))
          return false;
      }
    return true;
  }

  /// The lower and upper face and the heights next to them.
  bool scan_ends(int& culprit) {
    const int stride = stride_of_ends();
    const int last = static_cast<int>(seen_.size());
    const bool lower = exists(Side::z_lo), upper = exists(Side::z_hi);
    if (!lower && !upper) return true;
    for (int i = 2 * wave_.box_lo[0]; i <= 2 * wave_.box_hi[0]; i += stride)
      for (int j = 2 * wave_.box_lo[1]; j <= 2 * wave_.box_hi[1]; j += stride) {
        const double x_m = half_step_m(Axis::x, i), y_m = half_step_m(Axis::y, j);
        if (lower && !scan_line(x_m, y_m, 0, 2 * beyond + 1, culprit)) return false;
        if (upper && !scan_line(x_m, y_m, last - 2 * beyond - 1, last, culprit)) return false;
      }
    return true;
  }

  const Problem& problem_;
  const PlaneWave& wave_;
  const Lattice& lattice_;
  double tolerance_m_ = 0.0;
  Vec3 cell_m_{};
  int first_ = 0;
  std::vector<Seen> seen_;
  std::vector<int> near_;  ///< objects that may touch the surface, in painting order
  std::vector<int> line_;
};

/// A finite object that the wave never reaches because it stands outside the surface.
void warn_of_unlit(Reading& reading, const std::vector<Cursor>& entries, const Problem& problem,
                   const PlaneWave& wave) {
  for (std::size_t n = 0; n < problem.objects.size(); ++n) {
    const Bounds bounds = bounds_of(problem.objects[n].shape);
    for (Side side : all_sides) {
      if (!wave.box_face[static_cast<std::size_t>(index_of(side))]) continue;
      const auto i = static_cast<std::size_t>(index_of(axis_of(side)));
      const double end_m =
          problem.lattice.along(axis_of(side)).node_m((is_high(side) ? wave.box_hi : wave.box_lo)[i]);
      if (is_high(side) ? bounds.lo_m[i] <= end_m : bounds.hi_m[i] >= end_m) continue;
      if (std::holds_alternative<Layer>(problem.objects[n].shape) ||
          std::holds_alternative<HalfSpace>(problem.objects[n].shape))
        continue;
      reading.warn(
          entries[n].place(),
          fmt::format("{} stands outside the surface of the plane wave at {}: the wave does not light it",
                      problem.objects[n].label, name_of(side)));
      break;
    }
  }
}

bool is_along_z(const PlaneWave& wave) {
  return std::abs(propagation_of(wave)[2]) > 1.0 - 1e-12;
}

}  // namespace

int check_surface(Cursor& root, Reading& reading, const Scene& scene) {
  if (!scene.problem.plane_wave) return scene.problem.background;
  const Problem& problem = scene.problem;
  const PlaneWave& wave = *problem.plane_wave;
  const std::vector<Cursor> entries = root.blocks("objects");
  const Cursor block = root.block("illumination").block("plane_wave");
  Surface surface(problem, wave);
  int culprit = -1;
  if (!surface.depends_on_z_only(culprit)) {
    const std::string label =
        culprit >= 0 ? problem.objects[static_cast<std::size_t>(culprit)].label : "an object";
    reject(scene.file,
           {culprit >= 0 ? entries[static_cast<std::size_t>(culprit)].place() : block.place(),
            fmt::format("{} crosses the surface of the plane wave", label),
            fmt::format("only layers and half-spaces across z may cross it; other objects stay inside it ({} "
                        "cells inside "
                        "the clear volume)",
                        std::max({wave.box_lo[0] - problem.lattice.clear_node(Side::x_lo),
                                  wave.box_lo[1] - problem.lattice.clear_node(Side::y_lo),
                                  wave.box_lo[2] - problem.lattice.clear_node(Side::z_lo),
                                  problem.lattice.clear_node(Side::z_hi) - wave.box_hi[2]})),
            "widen clear_volume, make the object smaller, or write it as a layer or half_space across z"});
  }
  if (const int conductor = surface.conductor(); conductor >= 0)
    reject(
        scene.file,
        {entries[static_cast<std::size_t>(conductor)].place(),
         fmt::format("{} is a perfect conductor on the surface of the plane wave",
                     problem.objects[static_cast<std::size_t>(conductor)].label),
         "perfect conductors inside the surface; over metal ground, periodic faces at x-, x+, y- and y+, so "
         "that the wave only enters from above",
         "keep the conductor inside the surface, make the sides periodic, or give it a conductivity"});
  if (!surface.is_homogeneous() && !is_along_z(wave))
    block.reject_text(
        "from", "an oblique plane wave on layers",
        "theta 0 deg or 180 deg over media layered along z; other directions need one homogeneous, lossless "
        "medium over the whole surface of the wave",
        "set theta to 0 deg, or keep the layers off the surface");
  if (!surface.is_homogeneous() && !surface.enters_cleanly())
    block.reject_text("from", "a layer ends where the plane wave enters",
                      "one medium for two cells on both sides of the surface where the wave enters",
                      "move the layer, or change plane_wave.surface_inset");
  const Medium& entry = problem.media[static_cast<std::size_t>(surface.entry_medium())];
  if (entry.is_perfect() || entry.conductivity_s_per_m > 0.0 || entry.magnetic_conductivity_ohm_per_m > 0.0)
    block.reject_text("from",
                      fmt::format("the plane wave enters through {}, which is {}", entry.name,
                                  entry.is_perfect() ? "a perfect conductor" : "lossy"),
                      "a lossless medium where the wave enters",
                      "let the wave come from the other side, or take the loss out of that medium");
  warn_of_unlit(reading, entries, problem, wave);
  return surface.entry_medium();
}

}  // namespace wanewall::scene
