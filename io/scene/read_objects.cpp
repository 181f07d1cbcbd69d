// What stands in the scene.
#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "io/scene/read.hpp"

namespace wanewall::scene {
namespace {

Axis axis_given(const Cursor& block) {
  for (Axis a : all_axes)
    if (block.has(name_of(a))) return a;
  throw std::logic_error("a plane without an axis passed the check of its keys");
}

Shape read_box(Cursor& block) {
  Box box;
  const Vec3 from = block.vec3("from"), to = block.vec3("to");
  for (std::size_t i = 0; i < 3; ++i) {
    box.lo_m[i] = std::min(from[i], to[i]);
    box.hi_m[i] = std::max(from[i], to[i]);
  }
  const int flat = static_cast<int>(box.lo_m[0] == box.hi_m[0]) +
                   static_cast<int>(box.lo_m[1] == box.hi_m[1]) +
                   static_cast<int>(box.lo_m[2] == box.hi_m[2]);
  if (flat > 1)
    block.reject("to", "a corner that differs from `from` along at least two axes",
                 "give the box an extent; only one may be zero");
  if (block.has("turn")) {
    Cursor turn = block.block("turn");
    const Vec3 axis = turn.vec3("axis");
    const double length = std::hypot(axis[0], axis[1], axis[2]);
    if (!(length > 0.0 && std::isfinite(length)))
      turn.reject("axis", "a direction that is not zero", "for a turn about z write [0, 0, 1]");
    for (std::size_t i = 0; i < 3; ++i) box.turn_axis[i] = axis[i] / length;
    box.turn_rad = turn.quantity("angle");
  }
  return box;
}

Shape read_cylinder(Cursor& block) {
  Cylinder cylinder{block.vec3("from"), block.vec3("to"), block.quantity("radius")};
  if (cylinder.from_m == cylinder.to_m)
    block.reject("to", "a point that differs from `from`", "give the cylinder a length");
  return cylinder;
}

Shape read_layer(Cursor& block) {
  const Axis axis = axis_given(block);
  const auto [lo_m, hi_m] = block.pair(name_of(axis));
  if (!(lo_m < hi_m))
    block.reject(name_of(axis), "two positions, the lower one first", "swap or move the two");
  return Layer{axis, lo_m, hi_m};
}

Shape read_half_space(Cursor& block) {
  const bool below = block.has("below");
  Cursor plane = block.block(below ? "below" : "above");
  const Axis axis = axis_given(plane);
  return HalfSpace{axis, plane.quantity(name_of(axis)), below};
}

constexpr const char* shape_keys[] = {"box", "sphere", "cylinder", "layer", "half_space"};

}  // namespace

void read_objects(Cursor& root, Scene& scene) {
  int count = 0;
  for (Cursor& entry : root.blocks("objects")) {
    for (const char* key : shape_keys) {
      if (!entry.has(key)) continue;
      Cursor block = entry.block(key);
      Object object;
      object.label = fmt::format("objects[{}] ({})", count, key);
      object.medium = medium_index(scene, block, "medium", block.word("medium"));
      const std::string_view shape = key;
      if (shape == "box") object.shape = read_box(block);
      if (shape == "sphere") {
        const Vec3 centre = block.vec3("centre");
        object.shape = Sphere{centre, block.quantity("radius")};
      }
      if (shape == "cylinder") object.shape = read_cylinder(block);
      if (shape == "layer") object.shape = read_layer(block);
      if (shape == "half_space") object.shape = read_half_space(block);
      scene.problem.objects.push_back(std::move(object));
    }
    ++count;
  }
}

}  // namespace wanewall::scene
