#include "geometry/objects.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

namespace wanewall {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();

Interval everything() {
  return {-infinity, infinity};
}
Interval nothing() {
  return {};
}

Interval common(const Interval& a, const Interval& b) {
  return {std::max(a.lo_m, b.lo_m), std::min(a.hi_m, b.hi_m)};
}

double dot(const Vec3& a, const Vec3& b) {
  return a[0] * b[0] + a[1] * b[1] + a[2] * b[2];
}
Vec3 minus(const Vec3& a, const Vec3& b) {
  return {a[0] - b[0], a[1] - b[1], a[2] - b[2]};
}

/// t with lo <= start + t slope <= hi.
Interval between(double start, double slope, double lo, double hi) {
  if (std::abs(slope) < 1e-12) return lo <= start && start <= hi ? everything() : nothing();
  const double t0 = (lo - start) / slope;
  const double t1 = (hi - start) / slope;
  return {std::min(t0, t1), std::max(t0, t1)};
}

/// Rodrigues' formula, angle -> -angle takes a point into the box's own frame.
Vec3 rotated(const Vec3& v, const Vec3& axis, double angle_rad) {
  const double c = std::cos(angle_rad), s = std::sin(angle_rad), along = dot(axis, v) * (1.0 - c);
  return {v[0] * c + (axis[1] * v[2] - axis[2] * v[1]) * s + axis[0] * along,
          v[1] * c + (axis[2] * v[0] - axis[0] * v[2]) * s + axis[1] * along,
          v[2] * c + (axis[0] * v[1] - axis[1] * v[0]) * s + axis[2] * along};
}

Interval z_interval(const Box& box, double x, double y, double tol) {
  if (box.turn_rad == 0.0) {
    if (x < box.lo_m[0] - tol || x > box.hi_m[0] + tol) return nothing();
    if (y < box.lo_m[1] - tol || y > box.hi_m[1] + tol) return nothing();
    return {box.lo_m[2] - tol, box.hi_m[2] + tol};
  }
  const Vec3 centre{0.5 * (box.lo_m[0] + box.hi_m[0]), 0.5 * (box.lo_m[1] + box.hi_m[1]),
                    0.5 * (box.lo_m[2] + box.hi_m[2])};
  const Vec3 start = rotated(minus({x, y, centre[2]}, centre), box.turn_axis, -box.turn_rad);
  const Vec3 slope = rotated({0.0, 0.0, 1.0}, box.turn_axis, -box.turn_rad);
  Interval inside = everything();
  for (std::size_t a = 0; a < 3; ++a) {
    const double half = 0.5 * (box.hi_m[a] - box.lo_m[a]) + tol;
    inside = common(inside, between(start[a], slope[a], -half, half));
  }
  return inside.empty() ? nothing() : Interval{inside.lo_m + centre[2], inside.hi_m + centre[2]};
}

Interval z_interval(const Sphere& sphere, double x, double y, double tol) {
  const double r = sphere.radius_m + tol;
  const double dx = x - sphere.centre_m[0], dy = y - sphere.centre_m[1];
  const double left = r * r - dx * dx - dy * dy;
  if (left < 0.0) return nothing();
  const double half = std::sqrt(left);
  return {sphere.centre_m[2] - half, sphere.centre_m[2] + half};
}

Interval z_interval(const Cylinder& cylinder, double x, double y, double tol) {
  Vec3 along = minus(cylinder.to_m, cylinder.from_m);
  const double length = std::sqrt(dot(along, along));
  for (double& component : along) component /= length;
  // Point on the line: start + t e_z with t = z - from_z.
  const Vec3 start{x - cylinder.from_m[0], y - cylinder.from_m[1], 0.0};
  Interval inside = between(dot(start, along), along[2], -tol, length + tol);
  if (inside.empty()) return nothing();
  const double r = cylinder.radius_m + tol;
  // |p - (p.a) a|^2 <= r^2 as a t^2 + 2 b t + c <= 0.
  const double start_along = dot(start, along);
  const double a = 1.0 - along[2] * along[2];
  const double b = -start_along * along[2];
  const double c = dot(start, start) - start_along * start_along - r * r;
  if (a < 1e-12) {
    if (c > 0.0) return nothing();
  } else {
    const double under_root = b * b - a * c;
    if (under_root < 0.0) return nothing();
    const double root = std::sqrt(under_root);
    inside = common(inside, {(-b - root) / a, (-b + root) / a});
  }
  return inside.empty() ? nothing()
                        : Interval{inside.lo_m + cylinder.from_m[2], inside.hi_m + cylinder.from_m[2]};
}

Interval slab(Axis axis, double lo, double hi, double x, double y) {
  if (axis == Axis::z) return {lo, hi};
  const double coordinate = axis == Axis::x ? x : y;
  return lo <= coordinate && coordinate <= hi ? everything() : nothing();
}

Interval z_interval(const Layer& layer, double x, double y, double tol) {
  return slab(layer.axis, layer.lo_m - tol, layer.hi_m + tol, x, y);
}

Interval z_interval(const HalfSpace& half, double x, double y, double tol) {
  return half.below ? slab(half.axis, -infinity, half.at_m + tol, x, y)
                    : slab(half.axis, half.at_m - tol, infinity, x, y);
}

bool is_block(const Box& box) {
  return box.turn_rad == 0.0;
}
bool is_block(const Sphere&) {
  return false;
}
bool is_block(const Cylinder&) {
  return false;
}
bool is_block(const Layer&) {
  return true;
}
bool is_block(const HalfSpace&) {
  return true;
}

Bounds unbounded() {
  return {{-infinity, -infinity, -infinity}, {infinity, infinity, infinity}};
}

Bounds bounds(const Box& box) {
  if (box.turn_rad == 0.0) return {box.lo_m, box.hi_m};
  Bounds result{{infinity, infinity, infinity}, {-infinity, -infinity, -infinity}};
  for (int corner = 0; corner < 8; ++corner) {
    Vec3 centre{}, arm{};
    for (std::size_t a = 0; a < 3; ++a) {
      centre[a] = 0.5 * (box.lo_m[a] + box.hi_m[a]);
      arm[a] = ((corner >> a) & 1 ? 0.5 : -0.5) * (box.hi_m[a] - box.lo_m[a]);
    }
    const Vec3 turned = rotated(arm, box.turn_axis, box.turn_rad);
    for (std::size_t a = 0; a < 3; ++a) {
      result.lo_m[a] = std::min(result.lo_m[a], centre[a] + turned[a]);
      result.hi_m[a] = std::max(result.hi_m[a], centre[a] + turned[a]);
    }
  }
  return result;
}

Bounds bounds(const Sphere& sphere) {
  Bounds result;
  for (std::size_t a = 0; a < 3; ++a) {
    result.lo_m[a] = sphere.centre_m[a] - sphere.radius_m;
    result.hi_m[a] = sphere.centre_m[a] + sphere.radius_m;
  }
  return result;
}

Bounds bounds(const Cylinder& cylinder) {
  const Vec3 axis = minus(cylinder.to_m, cylinder.from_m);
  const double length2 = dot(axis, axis);
  Bounds result;
  for (std::size_t a = 0; a < 3; ++a) {
    const double reach = cylinder.radius_m * std::sqrt(std::max(0.0, 1.0 - axis[a] * axis[a] / length2));
    result.lo_m[a] = std::min(cylinder.from_m[a], cylinder.to_m[a]) - reach;
    result.hi_m[a] = std::max(cylinder.from_m[a], cylinder.to_m[a]) + reach;
  }
  return result;
}

Bounds bounds(const Layer& layer) {
  Bounds result = unbounded();
  result.lo_m[static_cast<std::size_t>(index_of(layer.axis))] = layer.lo_m;
  result.hi_m[static_cast<std::size_t>(index_of(layer.axis))] = layer.hi_m;
  return result;
}

Bounds bounds(const HalfSpace& half) {
  Bounds result = unbounded();
  const auto a = static_cast<std::size_t>(index_of(half.axis));
  (half.below ? result.hi_m : result.lo_m)[a] = half.at_m;
  return result;
}

}  // namespace

Interval z_interval(const Shape& shape, double x_m, double y_m, double tolerance_m) {
  return std::visit([&](const auto& s) { return z_interval(s, x_m, y_m, tolerance_m); }, shape);
}

bool is_block(const Shape& shape) {
  return std::visit([](const auto& s) { return is_block(s); }, shape);
}

Bounds bounds_of(const Shape& shape) {
  return std::visit([](const auto& s) { return bounds(s); }, shape);
}

}  // namespace wanewall
