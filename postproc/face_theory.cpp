#include "postproc/face_theory.hpp"

#include <cmath>

#include "geometry/constants.hpp"
#include "postproc/audit_planes.hpp"
#include "solver/shell/lattice_reflection.hpp"

namespace wanewall {
namespace {

using Complex = std::complex<double>;

bool cells_are_even_to_wall(const Lattice& lattice, const AuditFace& face) {
  const MeshLines& lines = lattice.along(axis_of(face.side));
  const int from = plane_zero(lattice, face);
  const double d = cell_outside_m(lattice, face, 0);
  const int begin = is_high(face.side) ? from : 0, end = is_high(face.side) ? lines.cells() : from;
  for (int i = begin; i < end; ++i)
    if (std::abs(lines.cell_m(i) - d) > 1e-9 * d) return false;
  return true;
}

}  // namespace

FaceTheory face_theory(const Lattice& lattice, const Face& layer, const AuditFace& face,
                       double frequency_hz) {
  FaceTheory theory;
  const int zero = plane_zero(lattice, face), first = lattice.clear_node(face.side);
  theory.cells_to_shell = std::abs(first - zero);
  if (layer.cells() != lattice.shell(face.side) || !cells_are_even_to_wall(lattice, face)) return theory;
  const double d = cell_outside_m(lattice, face, 0), dt_s = lattice.dt_s, omega = 2.0 * pi * frequency_hz;
  switch (layer.kind) {
    case FaceKind::cfs_pml:
      if (layer.cells() > 0)
        theory.reflection = [=, table = layer.layer](Complex k_n2) {
          return layer_reflection(table, d, dt_s, omega, k_n2);
        };
      break;
    case FaceKind::moebius:
      if (layer.cells() > 0)
        theory.reflection = [=, table = layer.moebius](Complex k_n2) {
          return layer_reflection(table, d, dt_s, omega, k_n2);
        };
      break;
    default:
      break;
  }
  return theory;
}

}  // namespace wanewall
