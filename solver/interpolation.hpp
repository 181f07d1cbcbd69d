// Linear interpolation between the positions of one component.
#pragma once

#include <algorithm>
#include <array>

#include "geometry/lattice.hpp"

namespace wanewall {

/// Two neighbouring indices along one axis and the weight of the upper one.
struct LinearPair {
  int lower = 0;
  int upper = 0;
  double upper_weight = 0.0;
};

/// The stored indices of a component on both sides of a position, clamped to those that exist.
inline LinearPair linear_pair(const Lattice& lattice, Component c, Axis a, double position_m) {
  const IndexRange stored = lattice.stored(c, a);
  if (stored.size() == 1) return {0, 0, 0.0};
  int lower = 0;
  while (lower + 2 < stored.end && lattice.position_m(c, a, lower + 1) <= position_m) ++lower;
  const double below = lattice.position_m(c, a, lower), above = lattice.position_m(c, a, lower + 1);
  double weight = std::clamp((position_m - below) / (above - below), 0.0, 1.0);
  // A position on a lattice point, but for rounding, is that point.
  if (weight < 1e-9) weight = 0.0;
  if (weight > 1.0 - 1e-9) weight = 1.0;
  return {lower, lower + 1, weight};
}

}  // namespace wanewall
