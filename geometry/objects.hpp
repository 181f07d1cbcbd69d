// What stands in a scene: shapes made of media, painted in order.
#pragma once

#include <string>
#include <variant>

#include "geometry/lattice.hpp"

namespace wanewall {

/// A box turned about its centre: by `turn_rad` around the unit vector `turn_axis` (right-hand rule).
struct Box {
  Vec3 lo_m{};
  Vec3 hi_m{};
  Vec3 turn_axis{0.0, 0.0, 1.0};
  double turn_rad = 0.0;
};

struct Sphere {
  Vec3 centre_m{};
  double radius_m = 0.0;
};

/// A solid cylinder with flat ends.
struct Cylinder {
  Vec3 from_m{};
  Vec3 to_m{};
  double radius_m = 0.0;
};

/// Everything with lo <= coordinate <= hi.
struct Layer {
  Axis axis = Axis::z;
  double lo_m = 0.0;
  double hi_m = 0.0;
};

/// Everything on one side of a plane.
struct HalfSpace {
  Axis axis = Axis::z;
  double at_m = 0.0;
  bool below = true;
};

using Shape = std::variant<Box, Sphere, Cylinder, Layer, HalfSpace>;

struct Object {
  Shape shape;
  int medium = 0;     ///< index into the scene's media
  std::string label;  ///< for messages, e.g. "objects[2] (cylinder)"
};

/// The part of a vertical line that lies inside a convex shape.
struct Interval {
  double lo_m = 1.0;
  double hi_m = -1.0;
  bool empty() const { return !(lo_m <= hi_m); }
};

/// Where the line (x, y, all z) runs inside a shape. The shape counts as closed and grown by `tolerance_m`,
/// so that faces that lie on mesh lines belong to it. Ends may be +-infinity.
Interval z_interval(const Shape& shape, double x_m, double y_m, double tolerance_m);

/// True for boxes that are not turned, layers and half spaces: whether a line (x, y) meets one of these is
/// decided by x and by y apart, and each line that meets it runs inside it over the same interval.
bool is_block(const Shape& shape);

/// Box with edges along the axes that holds the shape; ends may be +-infinity.
struct Bounds {
  Vec3 lo_m{};
  Vec3 hi_m{};
};
Bounds bounds_of(const Shape& shape);

}  // namespace wanewall
