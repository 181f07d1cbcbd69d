// What a face would reflect if there were no lattice: to show beside the exact value, never to rely on.
#pragma once

#include <complex>

#include "geometry/media.hpp"
#include "solver/problem.hpp"

namespace wanewall {

/// k^2 of a medium in the continuum [1/m^2].
std::complex<double> continuum_k_squared(const Medium& medium, double omega_rad_per_s);

/// Amplitude reflection in the continuum of the wave with the given k_n^2 along the normal: k^2 cos^2(theta),
/// or minus the square of a decay rate.
///   cfs_pml, moebius   -exp(-2 j integral s k_n dn); with kappa = 1 and alpha = 0 in vacuum this is
///                      -exp(-2 eta0 cos(theta) integral sigma dn), and -exp(-2 eta0 sigma_max L cos(theta)/
///                      (order + 1)) for a polynomial. Source: J.-P. Berenger, J. Comput. Phys. 114, 185
///                      (1994).
///   matched_slab       -exp(-2 j integral k_n dn) with the slab's own losses; what its inside reflects at
///                      oblique incidence is left out
///   one_way            ((cos(theta) - 1)/(cos(theta) + 1)) and minus its square for orders 1 and 2.
///                      Source: B. Engquist and A. Majda, Math. Comput. 31, 629 (1977)
///   walls              -1, +1
/// Integrals by Simpson's rule over each cell, the value at the outer wall by extrapolation where that is
/// still passive. Throws std::invalid_argument for periodic faces.
std::complex<double> continuum_reflection(const Face& face, const Medium& medium, double spacing_m,
                                          double omega_rad_per_s,
                                          std::complex<double> normal_k_squared_per_m2);

}  // namespace wanewall
