// Lattices and objects drawn at random: many shapes, many of them touching mesh lines and sample points.
#pragma once

#include <cmath>
#include <random>
#include <vector>

#include "geometry/media.hpp"
#include "geometry/objects.hpp"

namespace wanewall::test {

class RandomScene {
 public:
  explicit RandomScene(unsigned seed) : random_(seed) {}

  /// Cells of different lengths on all axes.
  Lattice lattice(Index3 cells) {
    Lattice lattice;
    for (std::size_t a = 0; a < 3; ++a) {
      std::vector<double> nodes_m{uniform(-2.0, 2.0)};
      for (int n = 0; n < cells[a]; ++n) nodes_m.push_back(nodes_m.back() + 1e-3 * uniform(0.6, 1.5));
      lattice.lines[a] = MeshLines(nodes_m);
    }
    lattice.dt_s = 0.9 * lattice.courant_limit_s();
    return lattice;
  }

  static std::vector<Medium> media() {
    return {{"vacuum", 1.0, 1.0, 0.0, 0.0, false, false},
            {"glass", 5.0, 2.0, 0.4, 6.0, false, false},
            {"clay", 3.3, 1.0, 0.01, 0.0, false, false},
            {"metal", 1.0, 1.0, 0.0, 0.0, true, false},
            {"magnetic", 1.0, 1.0, 0.0, 0.0, false, true}};
  }

  /// `curved`: spheres, cylinders and turned boxes too.
  std::vector<Object> objects(const Lattice& lattice, int n, bool curved) {
    std::vector<Object> objects;
    for (int m = 0; m < n; ++m) {
      const int medium = std::uniform_int_distribution(0, 4)(random_);
      objects.push_back(
          {shape(lattice, std::uniform_int_distribution(0, curved ? 5 : 2)(random_)), medium, ""});
    }
    return objects;
  }

 private:
  double uniform(double lo, double hi) { return std::uniform_real_distribution(lo, hi)(random_); }

  /// Half of all coordinates lie where samples lie: on nodes, half nodes and a quarter cell beside them. Some
  /// lie so near that the painter's tolerance of 1e-6 of the smallest cell decides.
  double coordinate(const Lattice& lattice, Axis axis) {
    const MeshLines& lines = lattice.along(axis);
    const int n = std::uniform_int_distribution(0, lines.cells() - 1)(random_);
    switch (std::uniform_int_distribution(0, 7)(random_)) {
      case 3:
        return lines.node_m(n) + 2e-9 * uniform(-1.0, 1.0);
      case 4:
        return lines.half_m(n) + 2e-9 * uniform(-1.0, 1.0);
      case 0:
        return lines.node_m(n);
      case 1:
        return lines.half_m(n);
      case 2:
        return lines.half_m(n) - 0.25 * lines.cell_m(n);
      default:
        return uniform(lines.node_m(0) - 1e-3, lines.node_m(lines.cells()) + 1e-3);
    }
  }
  Vec3 point(const Lattice& lattice) {
    return {coordinate(lattice, Axis::x), coordinate(lattice, Axis::y), coordinate(lattice, Axis::z)};
  }
  Vec3 direction() {
    Vec3 d{uniform(-1.0, 1.0), uniform(-1.0, 1.0), uniform(-1.0, 1.0)};
    const double length = std::sqrt(d[0] * d[0] + d[1] * d[1] + d[2] * d[2]);
    for (double& component : d) component /= length;
    return d;
  }

  Shape shape(const Lattice& lattice, int kind) {
    const Axis axis = all_axes[std::uniform_int_distribution<std::size_t>(0, 2)(random_)];
    const double size_m = lattice.along(axis).node_m(lattice.cells(axis)) - lattice.along(axis).node_m(0);
    switch (kind) {
      case 0: {
        const double a = coordinate(lattice, axis), b = coordinate(lattice, axis);
        return Layer{axis, std::min(a, b), std::max(a, b)};
      }
      case 1:
        return HalfSpace{axis, coordinate(lattice, axis), uniform(0.0, 1.0) < 0.5};
      case 2:
      case 3: {
        const Vec3 a = point(lattice), b = point(lattice);
        Box box{{}, {}, {0.0, 0.0, 1.0}, 0.0};
        for (std::size_t n = 0; n < 3; ++n) {
          box.lo_m[n] = std::min(a[n], b[n]);
          box.hi_m[n] = uniform(0.0, 1.0) < 0.1 ? box.lo_m[n] : std::max(a[n], b[n]);
        }
        if (kind == 3) {
          if (uniform(0.0, 1.0) < 0.7) box.turn_axis = direction();
          box.turn_rad = uniform(-3.0, 3.0);
        }
        return box;
      }
      case 4:
        return Sphere{point(lattice), uniform(0.1, 0.7) * size_m};
      default: {
        const Vec3 from = point(lattice);
        Vec3 to = point(lattice);
        if (uniform(0.0, 1.0) < 0.5) {  // along an axis
          to = from;
          to[static_cast<std::size_t>(index_of(axis))] += uniform(0.1, 1.0) * size_m;
        }
        return Cylinder{from, to, uniform(0.05, 0.4) * size_m};
      }
    }
  }

  std::mt19937 random_;
};

}  // namespace wanewall::test
