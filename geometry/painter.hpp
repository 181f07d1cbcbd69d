// The painter: what each edge (E component) and each face (H component) of the lattice is made of.
//
// A later object covers an earlier one. Objects have no end at the shell: they run on through it to the outer
// wall. An edge is a perfect conductor when the topmost object at its midpoint is one (objects are closed
// sets, so edges on the surface of a conductor belong to it). Otherwise its medium is the mean over eight
// points at +-1/4 cell around the midpoint, conductors left out: across the edge the arithmetic mean (E is
// continuous there), along the edge the series mean (D is continuous there):  1/eps = mean(1/eps_i), sigma =
// eps^2 mean(sigma_i / eps_i^2), the first-order form of 1/y = mean(1/y_i) for sigma << omega eps. Faces are
// treated in the dual way with mu and magnetic loss. Flat boundaries on mesh lines keep the scheme second
// order; others are known to a quarter cell.
#pragma once

#include <vector>

#include "geometry/lattice.hpp"
#include "geometry/media.hpp"
#include "geometry/objects.hpp"

namespace wanewall {

/// What one edge or face is made of. For an edge: relative permittivity and electric conductivity [S/m]; for
/// a face: relative permeability and magnetic conductivity [ohm/m]. A perfect one has its own field fixed at
/// zero.
struct Paint {
  double relative = 1.0;
  double loss = 0.0;
  bool perfect = false;
  bool operator==(const Paint&) const = default;
};

class Painter {
 public:
  /// Keeps references: media and objects must outlive the painter. `background` indexes media.
  Painter(const Lattice& lattice, const std::vector<Medium>& media, const std::vector<Object>& objects,
          int background);

  /// Paints the row (i, j, all k) of a component: one entry per stored k. Thread safe.
  void row(Component c, int i, int j, std::vector<Paint>& out) const;
  /// The same for k in [k.begin, k.end) only; out[0] is k.begin.
  void row(Component c, int i, int j, IndexRange k, std::vector<Paint>& out) const;

  /// Index of the medium at a point (topmost object, else background). Points on a boundary belong to the
  /// object.
  int medium_at(const Vec3& point_m) const;

 private:
  /// Medium of the topmost object at `n` increasing z on the line (x, y).
  void sample_line(double x_m, double y_m, const double* z_m, int n, double tolerance_m,
                   std::vector<int>& medium_of_sample) const;

  const Lattice& lattice_;
  const std::vector<Medium>& media_;
  const std::vector<Object>& objects_;
  int background_;
  double tolerance_m_;
  // z positions of the samples, for node and half rows: at the point itself and a quarter cell below and
  // above.
  std::vector<double> node_z_m_, node_z_lo_m_, node_z_hi_m_, half_z_m_, half_z_lo_m_, half_z_hi_m_;
};

}  // namespace wanewall
