// What a face reflects on the lattice, exactly: the update's own response at one frequency, for every kind.
//
// Time convention exp(+j omega t). A wave of the lattice varies along the normal as exp(-j k d) per cell and
// reaches the face; its reflection is the amplitude of tangential E that comes back, referred to the face's
// node. With the admittivity y and the impedivity z of the medium as the update has them,
//   y = j Omega eps + sigma cos(omega dt/2),  z = j Omega mu + sigma_m cos(omega dt/2),
//   Omega = (2/dt) sin(omega dt/2),  K^2 = -y z,
// every wave obeys K_n^2 = K^2 - K_t^2, K = (2/d) sin(k d/2) along each axis. So K_t^2 is minus the sum of
// the second differences along the face.
//   Sources: W. C. Chew and J. M. Jin, Electromagnetics 16, 325 (1996); J. Fang and Z. Wu, IEEE Microw.
//   Guided Wave Lett. 6, 332 (1996), for the idea of the layer's response on the lattice.
#pragma once

#include <complex>

#include "geometry/media.hpp"
#include "solver/problem.hpp"
#include "solver/shell/layer_table.hpp"
#include "solver/shell/polarisation.hpp"

namespace wanewall {

/// (2/dt) sin(omega dt/2) [rad/s].
double lattice_omega(double omega_rad_per_s, double dt_s);

/// (2/d) asin(K d/2): the wavenumber whose lattice value is K, with Im <= 0 (decaying along +n), else Re >= 0
/// [1/m].
std::complex<double> wavenumber_of_lattice(std::complex<double> lattice_k_squared_per_m2, double spacing_m);

/// y [S/m] and z [ohm/m] of a medium as the update has them.
struct LatticeMedium {
  std::complex<double> admittivity_s_per_m, impedivity_ohm_per_m;
  /// K^2 = -y z [1/m^2].
  std::complex<double> k_squared_per_m2() const { return -admittivity_s_per_m * impedivity_ohm_per_m; }
};
LatticeMedium lattice_medium(const Medium& medium, double omega_rad_per_s, double dt_s);

/// A wave that comes to a face.
struct FaceWave {
  double omega_rad_per_s = 0.0;
  std::complex<double> transverse_k_squared_per_m2;  ///< K_t^2
  Polarisation polarisation = Polarisation::te;      ///< only matched slabs tell the two apart
};

/// The wave with K_n = K cos(theta). In a lossy medium K is complex, and planes of equal phase and of equal
/// amplitude fall together.
FaceWave wave_at_angle(const Medium& medium, double omega_rad_per_s, double dt_s, double theta_rad,
                       Polarisation polarisation);
/// The wave that falls as exp(-decay n) towards the face; for this K_n = -j (2/d) sinh(decay d/2).
FaceWave wave_that_decays(const Medium& medium, double omega_rad_per_s, double dt_s, double decay_per_m,
                          double spacing_m, Polarisation polarisation);

/// Amplitude reflection of a face of any kind but periodic, whose cells are `spacing_m` along the normal, in
/// front of a medium that fills the layer too and does not vary along the normal. Layers end on a perfect
/// conductor. Magnetic walls give +1, electric walls -1. Throws std::invalid_argument for periodic faces.
std::complex<double> face_reflection(const Face& face, const Medium& medium, double spacing_m, double dt_s,
                                     const FaceWave& wave);

/// The parts of face_reflection that see nothing but K_n^2.

/// cfs_pml: (1/s_e) delta [(1/s_h) delta E] + K_n^2 E = 0, E = 0 on the outer wall, with
/// 1/s = 1/kappa + c/(1 - b exp(-j omega dt)); one recursion serves both polarisations.
std::complex<double> layer_reflection(const LayerTable& layer, double spacing_m, double dt_s,
                                      double omega_rad_per_s, std::complex<double> normal_k_squared_per_m2);

/// moebius: R = -prod ((1 - s q)/(1 + s q))^2 with q = j tan(k d/2) and s of each cell (layer_table.hpp).
std::complex<double> layer_reflection(const MoebiusTable& layer, double spacing_m, double dt_s,
                                      double omega_rad_per_s, std::complex<double> normal_k_squared_per_m2);

/// matched_slab: every component has an extra loss rate sigma/eps0, that of the node for components at nodes
/// (tangential E, normal H) and that of the half node for the others (tangential H, normal E). With A and B
/// at each place,  delta E = A H, delta H = B E,
///   te  A = z_t,  B = y_t + K_t^2/z_n          tm  A = z_t + K_t^2/y_n,  B = y_t.
std::complex<double> slab_reflection(const LayerTable& layer, const Medium& medium, double spacing_m,
                                     double dt_s, const FaceWave& wave);

/// one_way: tangential E on the wall's nodes, 0 the wall and 1 the next node inside, from
///   order 1   E0(n+1) = E1(n) + a [E1(n+1) - E0(n)]
///   order 2   E0(n+1) = -E1(n-1) + a [E1(n+1) + E0(n-1)] + b [E0(n) + E1(n)] + g D [E0(n) + E1(n)]
///   a = (c dt - d)/(c dt + d),  b = 2 d/(c dt + d),  g = d (c dt)^2/(2 (c dt + d)),
/// c the speed in the medium at the wall, D the sum of the second differences along the wall over their
/// spacings squared (so D = -K_t^2). Nodes at the wall's rim take order 1.
///   Source: G. Mur, IEEE Trans. Electromagn. Compat. 23, 377 (1981).
std::complex<double> one_way_reflection(int order, const Medium& medium, double spacing_m, double dt_s,
                                        const FaceWave& wave);

}  // namespace wanewall
