// Which of a face's recorded planes is which.
#pragma once

#include <Eigen/Core>
#include <array>
#include <complex>

#include "geometry/lattice.hpp"
#include "solver/results.hpp"

namespace wanewall {

/// The two tangential axes of a face in the order x, y, z: the order in which audit planes are stored.
struct FaceAxes {
  Axis normal = Axis::z;
  std::array<Axis, 2> tangential{Axis::x, Axis::y};
  /// +1 where (first, second, normal) is right-handed, -1 where it is not (y faces).
  double handedness = 1.0;
};
FaceAxes axes_of(Side side);

/// Index, along the normal, of node plane 0: the innermost recorded plane of tangential E. Throws
/// std::invalid_argument when there is none or when plane 2 would lie outside the lattice.
int plane_zero(const Lattice& lattice, const AuditFace& face);

/// Length [m] of the cell between node planes m and m + 1.
double cell_outside_m(const Lattice& lattice, const AuditFace& face, int m);

/// Tangential E on node plane m, or tangential H on half plane m (half a cell outside node plane m); null
/// when it was not recorded.
const AuditPlane* find_plane(const Lattice& lattice, const AuditFace& face, Component component, int m);

/// The sums of one frequency as a matrix [first][second]. Throws std::invalid_argument when the plane's size
/// is not that of the lattice.
using PlaneMap =
    Eigen::Map<const Eigen::Matrix<std::complex<double>, Eigen::Dynamic, Eigen::Dynamic, Eigen::RowMajor>>;
PlaneMap sums_at(const Lattice& lattice, const AuditFace& face, const AuditPlane& plane,
                 std::size_t frequency_index);

}  // namespace wanewall
