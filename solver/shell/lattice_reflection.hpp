// The exact reflection of a layer on the lattice, from the update's own response at a frequency.
//
// Time convention exp(+j omega t). One tridiagonal recursion serves both polarisations: with K_n^2 the
// squared lattice wavenumber along the normal,  (1/s_e) delta [(1/s_h) delta E] + K_n^2 E = 0,  E = 0 on the
// outer wall, and 1/s = 1/kappa + c/(1 - b exp(-j omega dt)).
//   Sources: W. C. Chew and J. M. Jin, Electromagnetics 16, 325 (1996); J. Fang and Z. Wu, IEEE Microw.
//   Guided Wave Lett. 6, 332 (1996), for the idea of the layer's response on the lattice.
#pragma once

#include <complex>

#include "solver/shell/layer_table.hpp"

namespace wanewall {

/// (2/dt) sin(omega dt/2) [rad/s].
double lattice_omega(double omega_rad_per_s, double dt_s);

/// (2/d) asin(K d/2): the wavenumber whose lattice value is K, with Im <= 0 (decaying along +n), else Re >= 0
/// [1/m].
std::complex<double> wavenumber_of_lattice(std::complex<double> lattice_k_squared_per_m2, double spacing_m);

/// Amplitude reflection of a cfs_pml layer backed by a perfect conductor, referred to the layer's first node.
///   normal_k_squared_per_m2   K_n^2 = n^2 Omega^2/c0^2 - K_t^2; negative for evanescent waves, complex in
///   lossy media spacing_m                 cell along the normal
std::complex<double> layer_reflection(const LayerTable& layer, double spacing_m, double dt_s,
                                      double omega_rad_per_s, std::complex<double> normal_k_squared_per_m2);

}  // namespace wanewall
