#include "postproc/audit_planes.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <stdexcept>

namespace wanewall {

FaceAxes axes_of(Side side) {
  switch (axis_of(side)) {
    case Axis::x:
      return {Axis::x, {Axis::y, Axis::z}, 1.0};
    case Axis::y:
      return {Axis::y, {Axis::x, Axis::z}, -1.0};
    case Axis::z:
      break;
  }
  return {Axis::z, {Axis::x, Axis::y}, 1.0};
}

int plane_zero(const Lattice& lattice, const AuditFace& face) {
  const Axis normal = axis_of(face.side);
  const bool high = is_high(face.side);
  bool found = false;
  int innermost = 0;
  for (const AuditPlane& plane : face.planes) {
    if (!is_electric(plane.component) || is_half(plane.component, normal)) continue;
    const int i = plane.normal_index;
    innermost = !found ? i : high ? std::min(innermost, i) : std::max(innermost, i);
    found = true;
  }
  const int plane_2 = high ? innermost + 2 : innermost - 2;
  if (!found || innermost < 0 || plane_2 < 0 || std::max(innermost, plane_2) > lattice.cells(normal))
    throw std::invalid_argument(fmt::format(
        "the shell audit of face {} has no planes of tangential E inside the lattice", name_of(face.side)));
  return innermost;
}

double cell_outside_m(const Lattice& lattice, const AuditFace& face, int m) {
  const int inner = plane_zero(lattice, face);
  return lattice.along(axis_of(face.side)).cell_m(is_high(face.side) ? inner + m : inner - m - 1);
}

const AuditPlane* find_plane(const Lattice& lattice, const AuditFace& face, Component component, int m) {
  const bool high = is_high(face.side);
  const bool on_nodes = is_electric(component);
  // Half index i lies between nodes i and i + 1, so outside node k it is k on high sides and k - 1 on low
  // ones.
  const int index = plane_zero(lattice, face) + (high ? m : -m) - (on_nodes || high ? 0 : 1);
  const auto found = std::find_if(face.planes.begin(), face.planes.end(), [&](const AuditPlane& plane) {
    return plane.component == component && plane.normal_index == index;
  });
  return found == face.planes.end() ? nullptr : &*found;
}

PlaneMap sums_at(const Lattice& lattice, const AuditFace& face, const AuditPlane& plane,
                 std::size_t frequency_index) {
  const FaceAxes axes = axes_of(face.side);
  const int n_first = lattice.stored(plane.component, axes.tangential[0]).size();
  const int n_second = lattice.stored(plane.component, axes.tangential[1]).size();
  const std::size_t count = static_cast<std::size_t>(n_first) * static_cast<std::size_t>(n_second);
  if (plane.shape[0] != n_first || plane.shape[1] != n_second ||
      plane.sums.size() < (frequency_index + 1) * count)
    throw std::invalid_argument(fmt::format(
        "the shell audit's plane of {} on face {} has {} x {} values, the lattice has {} x {}",
        name_of(plane.component), name_of(face.side), plane.shape[0], plane.shape[1], n_first, n_second));
  return {plane.sums.data() + frequency_index * count, n_first, n_second};
}

}  // namespace wanewall
