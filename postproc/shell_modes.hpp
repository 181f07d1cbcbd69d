// The lattice's own modes of a face's cross-section, side shells included.
//
// Every stretched difference acts along one axis only, and differences of different axes commute. So the
// cross-section of a face separates into two one-dimensional problems, also inside the side shells and in
// their edges. With D^h the difference of node values to half nodes and D^n that of half-node values to
// nodes, each with its layer's stretch at the frequency,
//   functions that live on nodes obey  D^n D^h u = lambda u,  functions on half nodes  D^h D^n u = lambda u,
// and a field component that is a product of the two has  K_n^2 = W^2 + lambda_1 + lambda_2  along the normal
// (K = (2/d) sin(k d/2), phasors exp(+j omega t)). The layers:
//   cfs_pml   1/s = 1/kappa + c/(1 - b exp(-j omega dt)) on both differences (stretch.hpp)
//   moebius   D^h = S^-1 delta, D^n = M^-1 delta with s of each cell (layer_table.hpp),
//             (M E)_j = 1/4 [s_j (E_j + E_j+1) - (E_j+1 - E_j)/s_j + s_j-1 (E_j-1 + E_j) + (E_j -
//             E_j-1)/s_j-1]
//
// Media that depend on z only: phi = y_z E_z and psi = zeta_z H_z obey scalar equations that separate too,
//   [D_x^n D_x^h + D_y^n D_y^h + y_z D_z^h (1/y_t) D_z^n - zeta_t y_z] phi = 0
//   [D_x^h D_x^n + D_y^h D_y^n + zeta_z D_z^n (1/zeta_t) D_z^h - y_t zeta_z] psi = 0
// with y and zeta the admittivity and impedivity as the update has them, y = j Omega eps + sigma cos(omega
// dt/2) and zeta = j Omega mu + sigma_m cos(omega dt/2); t on the components across z, z on those along it.
#pragma once

#include <Eigen/Core>
#include <array>
#include <string>

#include "geometry/lattice.hpp"
#include "solver/problem.hpp"
#include "solver/results.hpp"

namespace wanewall {

/// A complete set of functions of one axis for one staggering.
struct AxisModes {
  IndexRange indices;                 ///< stored indices that carry the functions
  Eigen::MatrixXcd modes;             ///< [index - indices.begin][mode]
  Eigen::MatrixXcd expand;            ///< [mode][index - indices.begin], the inverse
  Eigen::ArrayXcd eigenvalue_per_m2;  ///< lambda
  /// Largest entry of  modes diag(lambda) expand - operator,  relative to the operator's largest.
  double reconstruction_error = 0.0;
};

/// The two differences of an axis [1/m]: stretched, joined or ended as on the lattice.
struct AxisDifferences {
  IndexRange nodes, halves;   ///< moving node values, half-node values
  Eigen::MatrixXcd to_half;   ///< D^h [half][node]
  Eigen::MatrixXcd to_nodes;  ///< D^n [node][half]
};

/// Why an axis with these ends has no modes of this kind; empty when it has.
std::string no_modes_because(const Lattice& lattice, const std::array<Face, 6>& shell, Axis axis);

/// Throws std::invalid_argument when no_modes_because() has something to say.
AxisDifferences axis_differences(const Lattice& lattice, const std::array<Face, 6>& shell, Axis axis,
                                 double frequency_hz);

/// Functions of an axis in a uniform medium, on nodes or on half nodes.
AxisModes node_modes(const AxisDifferences& differences);
AxisModes half_modes(const AxisDifferences& differences);

/// Functions of z of E_z (on half nodes) and H_z (on nodes) in media that depend on z only. Their eigenvalues
/// hold W^2. Throws std::invalid_argument when the profile does not fit the axis.
AxisModes layered_ez_modes(const AxisDifferences& differences, const LayeredProfile& profile,
                           double frequency_hz, double dt_s);
AxisModes layered_hz_modes(const AxisDifferences& differences, const LayeredProfile& profile,
                           double frequency_hz, double dt_s);

/// Eigenfunctions of a full complex matrix through its Schur form, whose triangular factor also gives their
/// inverse.
AxisModes modes_of(const Eigen::MatrixXcd& matrix, IndexRange indices);

}  // namespace wanewall
