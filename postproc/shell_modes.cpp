#include "postproc/shell_modes.hpp"

#include <fmt/format.h>

#include <Eigen/Eigenvalues>
#include <Eigen/LU>
#include <cmath>
#include <complex>
#include <limits>
#include <stdexcept>
#include <vector>

#include "geometry/constants.hpp"
#include "solver/shell/lattice_reflection.hpp"
#include "solver/shell/stretch.hpp"

namespace wanewall {
namespace {

using Complex = std::complex<double>;
using Matrix = Eigen::MatrixXcd;
using Array = Eigen::ArrayXcd;

const Face& face_of(const std::array<Face, 6>& shell, Side side) {
  return shell[static_cast<std::size_t>(index_of(side))];
}

// 1/s of a cfs_pml node as the update applies it.
Complex inverse_stretch(double sigma, double kappa, double alpha, double dt_s, Complex z_inverse) {
  const Recursion r = layer_recursion(sigma, kappa, alpha, 1.0, dt_s);
  return 1.0 / kappa + r.c_per_m / (1.0 - r.b * z_inverse);
}

void stretch_by_cfs(AxisDifferences& d, const LayerTable& layer, bool high, double dt_s, Complex z_inverse) {
  const int cells = layer.cells(), n = d.halves.end;
  for (int depth = 0; depth < cells; ++depth) {
    const auto at = static_cast<std::size_t>(depth);
    const int node = high ? n - cells + depth : cells - depth;
    const int half = high ? n - cells + depth : cells - 1 - depth;
    d.to_nodes.row(node - d.nodes.begin) *= inverse_stretch(layer.sigma_e_s_per_m[at], layer.kappa_e[at],
                                                            layer.alpha_e_s_per_m[at], dt_s, z_inverse);
    d.to_half.row(half) *= inverse_stretch(layer.sigma_h_s_per_m[at], layer.kappa_h[at],
                                           layer.alpha_h_s_per_m[at], dt_s, z_inverse);
  }
}

void stretch_by_moebius(AxisDifferences& d, const MoebiusTable& layer, bool high, double dt_s,
                        Complex z_inverse) {
  const int cells = layer.cells(), n = d.halves.end;
  const Complex p = 2.0 / dt_s * (1.0 - z_inverse) / (1.0 + z_inverse);
  std::vector<Complex> s;
  for (int j = 0; j < cells; ++j) {
    const auto at = static_cast<std::size_t>(j);
    s.push_back(layer.kappa[at] + layer.sigma_s_per_m[at] / (layer.alpha_s_per_m[at] + eps0_f_per_m * p));
  }
  // M on the layer's nodes 0 .. cells - 1, counted outwards; E is zero on the wall beyond.
  Matrix m = Matrix::Zero(cells, cells);
  for (int j = 0; j < cells; ++j) {
    const Complex here = s[static_cast<std::size_t>(j)];
    const Complex before = j > 0 ? s[static_cast<std::size_t>(j - 1)] : Complex(1.0);
    m(j, j) = 0.25 * (here + 1.0 / here + before + 1.0 / before);
    if (j > 0) m(j, j - 1) = 0.25 * (before - 1.0 / before);
    if (j + 1 < cells) m(j, j + 1) = 0.25 * (here - 1.0 / here);
  }
  Matrix rows(cells, d.to_nodes.cols());
  const auto row_of = [&](int j) { return (high ? n - cells + j : cells - j) - d.nodes.begin; };
  for (int j = 0; j < cells; ++j) {
    rows.row(j) = d.to_nodes.row(row_of(j));
    d.to_half.row(high ? n - cells + j : cells - 1 - j) /= s[static_cast<std::size_t>(j)];
  }
  const Matrix solved = m.partialPivLu().solve(rows);
  for (int j = 0; j < cells; ++j) d.to_nodes.row(row_of(j)) = solved.row(j);
}

// Admittivity or impedivity at one frequency.
Array immittance(const std::vector<double>& relative, const std::vector<double>& loss, double vacuum,
                 IndexRange indices, double frequency_hz, double dt_s) {
  if (relative.size() != loss.size() || static_cast<int>(relative.size()) < indices.end)
    throw std::invalid_argument("the media profile along z does not fit the lattice");
  const double half_angle = pi * frequency_hz * dt_s, omega = 2.0 / dt_s * std::sin(half_angle);
  Array y(indices.size());
  for (int i = 0; i < indices.size(); ++i) {
    const auto at = static_cast<std::size_t>(indices.begin + i);
    y[i] = {std::cos(half_angle) * loss[at], omega * vacuum * relative[at]};
  }
  return y;
}

// Modes of y times the field, turned into modes of the field.
AxisModes of_the_field(AxisModes modes, const Array& y) {
  modes.modes = y.inverse().matrix().asDiagonal() * modes.modes;
  modes.expand = modes.expand * y.matrix().asDiagonal();
  return modes;
}

}  // namespace

std::string no_modes_because(const Lattice& lattice, const std::array<Face, 6>& shell, Axis axis) {
  for (const bool high : {false, true}) {
    const Side side = side_of(axis, high);
    const Face& face = face_of(shell, side);
    if (face.kind == FaceKind::matched_slab || face.kind == FaceKind::one_way)
      return fmt::format("the {} face {} beside it has no separable modes", name_of(face.kind),
                         name_of(side));
    if (face.cells() != lattice.shell(side))
      return fmt::format("the record does not say what the layer of face {} is made of", name_of(side));
    if ((face.kind == FaceKind::periodic) != lattice.periodic[static_cast<std::size_t>(index_of(axis))])
      return fmt::format("the record does not say what ends the lattice on face {}", name_of(side));
  }
  return {};
}

AxisDifferences axis_differences(const Lattice& lattice, const std::array<Face, 6>& shell, Axis axis,
                                 double frequency_hz) {
  const std::string unfit = no_modes_because(lattice, shell, axis);
  if (!unfit.empty())
    throw std::invalid_argument("no modes along " + std::string(name_of(axis)) + ": " + unfit);
  const MeshLines& lines = lattice.along(axis);
  const int n = lines.cells();
  const bool joined = lattice.periodic[static_cast<std::size_t>(index_of(axis))];
  const bool magnetic_lo = face_of(shell, side_of(axis, false)).kind == FaceKind::magnetic_wall;
  const bool magnetic_hi = face_of(shell, side_of(axis, true)).kind == FaceKind::magnetic_wall;

  AxisDifferences d;
  d.halves = {0, n};
  d.nodes = joined ? IndexRange{0, n} : IndexRange{magnetic_lo ? 0 : 1, magnetic_hi ? n + 1 : n};
  d.to_half = Matrix::Zero(n, d.nodes.size());
  d.to_nodes = Matrix::Zero(d.nodes.size(), n);
  for (int j = 0; j < n; ++j) {
    const double inverse_m = 1.0 / lines.cell_m(j);
    const int above = joined ? (j + 1) % n : j + 1;
    if (d.nodes.contains(above)) d.to_half(j, above - d.nodes.begin) += inverse_m;
    if (d.nodes.contains(j)) d.to_half(j, j - d.nodes.begin) -= inverse_m;
  }
  for (int i = d.nodes.begin; i < d.nodes.end; ++i) {
    const double dual_m = joined && i == 0 ? 0.5 * (lines.cell_m(0) + lines.cell_m(n - 1)) : lines.dual_m(i);
    const int row = i - d.nodes.begin;
    // Beyond a magnetic wall the half-node values are mirrored with their sign turned.
    if (i < n) d.to_nodes(row, i) += (i == 0 && magnetic_lo ? 2.0 : 1.0) / dual_m;
    if (i > 0) d.to_nodes(row, i - 1) -= (i == n ? 2.0 : 1.0) / dual_m;
    if (i == 0 && joined) d.to_nodes(row, n - 1) -= 1.0 / dual_m;
  }
  const Complex z_inverse = std::exp(Complex(0.0, -2.0 * pi * frequency_hz * lattice.dt_s));
  for (const bool high : {false, true}) {
    const Face& face = face_of(shell, side_of(axis, high));
    if (face.kind == FaceKind::cfs_pml) stretch_by_cfs(d, face.layer, high, lattice.dt_s, z_inverse);
    if (face.kind == FaceKind::moebius) stretch_by_moebius(d, face.moebius, high, lattice.dt_s, z_inverse);
  }
  return d;
}

AxisModes modes_of(const Matrix& matrix, IndexRange indices) {
  const Eigen::Index n = matrix.rows();
  const Eigen::ComplexSchur<Matrix> schur(matrix);
  if (schur.info() != Eigen::Success)
    throw std::invalid_argument("the modes of a face's cross-section could not be found");
  const Matrix& t = schur.matrixT();
  const double smallest = std::numeric_limits<double>::epsilon() * t.diagonal().cwiseAbs().maxCoeff();
  Matrix x = Matrix::Zero(n, n);
  for (Eigen::Index k = 0; k < n; ++k) {
    x(k, k) = 1.0;
    for (Eigen::Index i = k; i-- > 0;) {
      const Complex sum = t.row(i).segment(i + 1, k - i) * x.col(k).segment(i + 1, k - i);
      Complex gap = t(i, i) - t(k, k);
      if (std::abs(gap) < smallest) gap = smallest;
      x(i, k) = -sum / gap;
    }
    x.col(k) /= x.col(k).norm();
  }
  AxisModes result;
  result.indices = indices;
  result.modes = schur.matrixU() * x;
  result.expand = x.triangularView<Eigen::Upper>().solve(schur.matrixU().adjoint());
  result.eigenvalue_per_m2 = t.diagonal().array();
  const Matrix again = result.modes * t.diagonal().asDiagonal() * result.expand;
  result.reconstruction_error = (again - matrix).cwiseAbs().maxCoeff() / matrix.cwiseAbs().maxCoeff();
  return result;
}

AxisModes node_modes(const AxisDifferences& d) {
  return modes_of(d.to_nodes * d.to_half, d.nodes);
}

AxisModes half_modes(const AxisDifferences& d) {
  return modes_of(d.to_half * d.to_nodes, d.halves);
}

AxisModes layered_ez_modes(const AxisDifferences& d, const LayeredProfile& profile, double frequency_hz,
                           double dt_s) {
  const auto y = [&](const auto& relative, const auto& loss, IndexRange indices) {
    return immittance(relative, loss, eps0_f_per_m, indices, frequency_hz, dt_s);
  };
  const Array y_z = y(profile.permittivity_rel_half, profile.conductivity_s_per_m_half, d.halves);
  const Array y_t = y(profile.permittivity_rel_node, profile.conductivity_s_per_m_node, d.nodes);
  const Array zeta_t = immittance(profile.permeability_rel_half, profile.magnetic_conductivity_ohm_per_m_half,
                                  mu0_h_per_m, d.halves, frequency_hz, dt_s);
  Matrix a = y_z.matrix().asDiagonal() * (d.to_half * y_t.inverse().matrix().asDiagonal() * d.to_nodes);
  a.diagonal().array() -= zeta_t * y_z;
  return of_the_field(modes_of(a, d.halves), y_z);
}

AxisModes layered_hz_modes(const AxisDifferences& d, const LayeredProfile& profile, double frequency_hz,
                           double dt_s) {
  const auto zeta = [&](const auto& relative, const auto& loss, IndexRange indices) {
    return immittance(relative, loss, mu0_h_per_m, indices, frequency_hz, dt_s);
  };
  const Array zeta_z =
      zeta(profile.permeability_rel_node, profile.magnetic_conductivity_ohm_per_m_node, d.nodes);
  const Array zeta_t =
      zeta(profile.permeability_rel_half, profile.magnetic_conductivity_ohm_per_m_half, d.halves);
  const Array y_t = immittance(profile.permittivity_rel_node, profile.conductivity_s_per_m_node, eps0_f_per_m,
                               d.nodes, frequency_hz, dt_s);
  Matrix a = zeta_z.matrix().asDiagonal() * (d.to_nodes * zeta_t.inverse().matrix().asDiagonal() * d.to_half);
  a.diagonal().array() -= y_t * zeta_z;
  return of_the_field(modes_of(a, d.nodes), zeta_z);
}

}  // namespace wanewall
