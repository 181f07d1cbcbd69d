// Objects that miss the lattice, objects that slip through its meshes, and media nothing is made of.
#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "io/scene/checks.hpp"
#include "io/scene/read.hpp"
#include "io/scene/resolution.hpp"

namespace wanewall::scene {
namespace {

/// Indices of a component along an axis whose positions lie within [lo, hi].
IndexRange within(const Lattice& lattice, Component c, Axis a, double lo_m, double hi_m) {
  const IndexRange all = lattice.stored(c, a);
  const auto first_not_below = [&](double bound_m) {
    int lo = all.begin, hi = all.end;
    while (lo < hi) {
      const int middle = lo + (hi - lo) / 2;
      (lattice.position_m(c, a, middle) < bound_m ? lo : hi) =
          lattice.position_m(c, a, middle) < bound_m ? middle + 1 : middle;
    }
    return lo;
  };
  IndexRange range{first_not_below(lo_m), first_not_below(hi_m)};
  while (range.end < all.end && lattice.position_m(c, a, range.end) <= hi_m) ++range.end;
  return range;
}

/// Rows of edges that are looked at before an object gets the benefit of the doubt.
constexpr long most_rows = 2'000'000;

/// Whether the midpoint of any edge lies in the shape.
bool holds_an_edge(const Lattice& lattice, const Shape& shape, double tolerance_m) {
  const Bounds bounds = bounds_of(shape);
  long rows = 0;
  for (Axis of_edge : all_axes) {
    const Component c = electric(of_edge);
    std::array<IndexRange, 3> range;
    for (Axis a : all_axes) {
      const auto i = static_cast<std::size_t>(index_of(a));
      range[i] = within(lattice, c, a, bounds.lo_m[i] - tolerance_m, bounds.hi_m[i] + tolerance_m);
      const bool endless = !std::isfinite(bounds.lo_m[i]) && !std::isfinite(bounds.hi_m[i]);
      if (endless && a != Axis::z) range[i].end = std::min(range[i].end, range[i].begin + 1);  // all alike
    }
    for (int i = range[0].begin; i < range[0].end; ++i)
      for (int j = range[1].begin; j < range[1].end; ++j) {
        const Interval inside = z_interval(shape, lattice.position_m(c, Axis::x, i),
                                           lattice.position_m(c, Axis::y, j), tolerance_m);
        if (++rows > most_rows) return true;
        if (!inside.empty() && within(lattice, c, Axis::z, inside.lo_m, inside.hi_m).size() > 0) return true;
      }
  }
  return false;
}

Bounds lattice_bounds(const Lattice& lattice) {
  Bounds bounds;
  for (Axis a : all_axes) {
    const auto i = static_cast<std::size_t>(index_of(a));
    bounds.lo_m[i] = lattice.along(a).node_m(0);
    bounds.hi_m[i] = lattice.along(a).node_m(lattice.cells(a));
  }
  return bounds;
}

}  // namespace

void check_objects(Cursor& root, Reading& reading, const Scene& scene) {
  const Problem& problem = scene.problem;
  const Bounds lattice = lattice_bounds(problem.lattice);
  double tolerance_m = problem.lattice.along(Axis::x).smallest_cell_m();
  for (Axis a : all_axes) tolerance_m = std::min(tolerance_m, problem.lattice.along(a).smallest_cell_m());
  tolerance_m *= 1e-6;
  const std::vector<Cursor> entries = root.blocks("objects");
  for (std::size_t n = 0; n < problem.objects.size(); ++n) {
    const Object& object = problem.objects[n];
    const Bounds bounds = bounds_of(object.shape);
    for (Axis a : all_axes) {
      const auto i = static_cast<std::size_t>(index_of(a));
      if (bounds.lo_m[i] <= lattice.hi_m[i] + tolerance_m && bounds.hi_m[i] >= lattice.lo_m[i] - tolerance_m)
        continue;
      reject(scene.file, {entries[n].place(),
                          fmt::format("{} lies outside the lattice along {}", object.label, name_of(a)),
                          "objects that reach into the lattice, shell included: " + bounds_text(lattice),
                          "move the object, widen clear_volume, or remove the object"});
    }
    if (!holds_an_edge(problem.lattice, object.shape, tolerance_m))
      reading.warn(
          entries[n].place(),
          fmt::format(
              "{} holds no edge of the lattice: it is thinner than the mesh and hardly seen, if at all; "
              "make the cells smaller or move it onto mesh lines",
              object.label));
  }
  const std::vector<int> used = media_in_use(problem);
  for (std::size_t m = 1; m < problem.media.size(); ++m)
    if (std::find(used.begin(), used.end(), static_cast<int>(m)) == used.end())
      reading.warn(root.place("media"), fmt::format("nothing is made of media.{}", problem.media[m].name));
}

}  // namespace wanewall::scene
