// One edge or face at a time, every object asked at each of the nine sample points: what geometry/painter.hpp
// says in words, without classes, runs or anything remembered. The painter must agree to the last bit.
#pragma once

#include <algorithm>
#include <vector>

#include "geometry/painter.hpp"

namespace wanewall::test {

struct SlowPainter {
  const Lattice& lattice;
  const std::vector<Medium>& media;
  const std::vector<Object>& objects;
  int background = 0;

  Paint at(Component c, Index3 where) const {
    double smallest = lattice.along(Axis::x).smallest_cell_m();
    for (Axis a : all_axes) smallest = std::min(smallest, lattice.along(a).smallest_cell_m());
    const Vec3 middle = lattice.position_m(c, where);
    Vec3 quarter{};
    for (Axis a : all_axes) {
      const auto n = static_cast<std::size_t>(index_of(a));
      const MeshLines& lines = lattice.along(a);
      quarter[n] = 0.25 * (is_half(c, a) ? lines.cell_m(where[n]) : lines.dual_m(where[n]));
    }
    const Medium& centre = topmost(middle, 1e-6 * smallest);
    if (is_perfect(centre, c)) return {1.0, 0.0, true};
    std::vector<const Medium*> low, high;  // along the component's own axis
    bool same = true;
    for (const double sy : {-1.0, 1.0}) {
      for (const double sx : {-1.0, 1.0}) {
        for (const double sz : {-1.0, 1.0}) {
          const Medium& medium = topmost(
              {middle[0] + sx * quarter[0], middle[1] + sy * quarter[1], middle[2] + sz * quarter[2]}, 0.0);
          const double along = std::array{sx, sy, sz}[static_cast<std::size_t>(index_of(axis_of(c)))];
          (along < 0.0 ? low : high).push_back(&medium);
          same = same && &medium == &centre;
        }
      }
    }
    if (same) return {relative(centre, c), loss(centre, c), false};
    const Paint a = mean(low, c), b = mean(high, c);
    if (a.perfect) return b;
    if (b.perfect) return a;
    if (a == b) return a;
    const double r = 2.0 * a.relative * b.relative / (a.relative + b.relative);
    return {r, r * r * 0.5 * (a.loss / (a.relative * a.relative) + b.loss / (b.relative * b.relative)),
            false};
  }

 private:
  const Medium& topmost(const Vec3& point_m, double tolerance_m) const {
    int medium = background;
    for (const Object& object : objects) {
      const Interval inside = z_interval(object.shape, point_m[0], point_m[1], tolerance_m);
      if (inside.lo_m <= point_m[2] && point_m[2] <= inside.hi_m) medium = object.medium;
    }
    return media[static_cast<std::size_t>(medium)];
  }
  static bool is_perfect(const Medium& m, Component c) {
    return is_electric(c) ? m.perfect_electric : m.perfect_magnetic;
  }
  static double relative(const Medium& m, Component c) {
    return is_electric(c) ? m.permittivity_rel : m.permeability_rel;
  }
  static double loss(const Medium& m, Component c) {
    return is_electric(c) ? m.conductivity_s_per_m : m.magnetic_conductivity_ohm_per_m;
  }
  static Paint mean(const std::vector<const Medium*>& samples, Component c) {
    Paint sum{0.0, 0.0, false};
    int used = 0;
    for (const Medium* m : samples) {
      if (is_perfect(*m, c)) continue;
      sum.relative += relative(*m, c);
      sum.loss += loss(*m, c);
      ++used;
    }
    if (used == 0) return {1.0, 0.0, true};
    return {sum.relative / used, sum.loss / used, false};
  }
};

}  // namespace wanewall::test
