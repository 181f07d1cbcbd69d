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
//
// Most rows are like their neighbours. What an object adds to a row depends, for a block, on which of the
// row's sample lines lie in its outline; for every other shape on the lines themselves, but only within its
// bounds. So the painter sorts x and y indices into classes beforehand; rows of the same classes without a
// curved or tilted object nearby are equal.
#pragma once

#include <array>
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

/// A stretch of a row that is made of one thing: k in [begin, end).
struct PaintRun {
  int begin = 0;
  int end = 0;
  Paint paint;
  bool operator==(const PaintRun&) const = default;
};

class Painter {
 public:
  /// Keeps references: media and objects must outlive the painter and stay as they are. `background` indexes
  /// media.
  Painter(const Lattice& lattice, const std::vector<Medium>& media, const std::vector<Object>& objects,
          int background);

  /// Paints the row (i, j, all k) of a component: one entry per stored k. Thread safe.
  void row(Component c, int i, int j, std::vector<Paint>& out) const;
  /// The same for k in [k.begin, k.end) only; out[0] is k.begin.
  void row(Component c, int i, int j, IndexRange k, std::vector<Paint>& out) const;
  /// The same as runs that follow one another; two neighbours differ. Thread safe.
  void runs(Component c, int i, int j, IndexRange k, std::vector<PaintRun>& out) const;

  /// True only when the whole rows (i, j) and (i2, j2) of a component are equal. False may mean that this is
  /// not known without painting them.
  bool surely_equal(Component c, int i, int j, int i2, int j2) const;

  /// Index of the medium at a point (topmost object, else background). Points on a boundary belong to the
  /// object.
  int medium_at(const Vec3& point_m) const;

 private:
  // A row is sampled on nine lines' worth of points: the middle, then four lines around it, each a quarter
  // cell below and above.
  static constexpr std::size_t n_samples = 9;
  struct Samples {  // z of the samples of all rows on nodes or on half nodes
    std::vector<double> middle_m, below_m, above_m;
  };
  // What an index along x (or y) knows of an object: for a block, which of its three sample positions
  // (bit 0: the middle, 1: a quarter cell below, 2: above) lie in it; for others, only that it may be near.
  struct Near {
    int object = 0;
    int positions = 0;
    auto operator<=>(const Near&) const = default;
  };
  struct Class {
    std::vector<Near> near;  // in the order of the objects
    std::vector<int> not_blocks;
  };
  struct Indices {  // along x or y
    std::vector<Class> classes;
    std::array<std::vector<int>, 2> class_of;  // [on half nodes][index]
  };
  struct Mark {  // where one object covers the samples of a row
    int medium = 0;
    std::array<IndexRange, n_samples> covered;
  };

  Indices sort_indices(Axis axis) const;
  const Class& class_at(Component c, Axis axis, int index) const;
  /// Appends what an object near the row may cover; k counts from the range's begin.
  void mark_block(const Near& in_x, const Near& in_y, bool half_z, IndexRange k,
                  std::vector<Mark>& marks) const;
  void mark_other(int object, Component c, int i, int j, IndexRange k, std::vector<Mark>& marks) const;
  void paint_marks(Component c, const std::vector<Mark>& marks, IndexRange k,
                   std::vector<PaintRun>& out) const;
  Paint paint_of(Component c, const std::array<int, n_samples>& media) const;

  const Lattice& lattice_;
  const std::vector<Medium>& media_;
  const std::vector<Object>& objects_;
  int background_;
  double tolerance_m_;
  double smallest_cell_m_;
  std::array<Samples, 2> z_;    // [on half nodes]
  std::vector<Bounds> bounds_;  // of each object
  std::vector<std::array<std::array<IndexRange, 3>, 2>>
      block_in_z_;  // [object][on half nodes][as in Samples]
  Indices x_, y_;
  long serial_;  // tells painters apart in what threads remember
};

}  // namespace wanewall
