// Plane waves of a uniform medium on the Yee lattice: the numbers that the split into outgoing and incoming
// parts needs.
//
// Phasors go with exp(+j omega t), and each component has its own time and place. A difference along axis i
// then acts on exp(-j k.r) as -j K_i with K_i = (2/d_i) sin(k_i d_i/2), and
//   K x E = Omega mu H,   -j K x H = y E,   y = j Omega eps + sigma cos(omega dt/2),   Omega = (2/dt)
//   sin(omega dt/2), K_x^2 + K_y^2 + K_z^2 = W^2 = -j Omega mu y.
// The cosine comes from the update's mean of old and new E in the conduction current.
// Source of the lossless relation: A. Taflove and S. C. Hagness, Computational Electrodynamics, 3rd ed.,
// ch. 4.
#pragma once

#include <complex>

namespace wanewall {

/// A medium at one frequency, as the lattice sees it.
struct FaceMedium {
  std::complex<double> w2_per_m2;                                 ///< W^2
  std::complex<double> omega_mu_ohm_per_m;                        ///< Omega mu - j sigma_m cos(omega dt/2)
  std::complex<double> admittivity_s_per_m;                       ///< y
  double w_per_m() const { return std::sqrt(w2_per_m2).real(); }  ///< Re W
};

/// Relative permittivity and permeability >= 1, conductivities >= 0. Throws std::invalid_argument when the
/// frequency is not between 0 and half a period per time step.
FaceMedium face_medium(double permittivity_rel, double permeability_rel, double conductivity_s_per_m,
                       double frequency_hz, double dt_s, double magnetic_conductivity_ohm_per_m = 0.0);

/// (2/d) asin(K_n d/2) [rad/m] of the wave with K_n^2 = `normal_k_squared_per_m2`: the root that decays
/// outwards, Im < 0, and the one that travels outwards, Re > 0, when there is no decay.
std::complex<double> outward_wavenumber(std::complex<double> normal_k_squared_per_m2, double spacing_m);

/// The same for the wave whose transverse second differences have the eigenvalue `transverse_per_m2`
/// (-K_x^2 - K_y^2 for a plane wave).
std::complex<double> normal_wavenumber(const FaceMedium& medium, std::complex<double> transverse_per_m2,
                                       double spacing_m);

/// Power density per |E_t|^2 [S] that a plane wave carries through a face, as 1/2 Re(E x H*).n with E on the
/// node plane and H half a cell further out, which is what the direct sum over the lattice gives. E_t is the
/// tangential E on the node plane: TE has no other E, TM has E_t along the transverse wavevector. Lossless,
/// propagating: TE sin(kz d) / (2 eta W d), TM W d / (4 eta tan(kz d/2)), outgoing and returned alike.
struct NormalFlux {
  double te_outgoing = 0.0;  ///< outwards, by the outgoing wave alone
  double te_returned = 0.0;  ///< inwards, by the incoming wave alone
  double tm_outgoing = 0.0;
  double tm_returned = 0.0;
};
NormalFlux normal_flux(const FaceMedium& medium, std::complex<double> normal_rad_per_m, double spacing_m);

}  // namespace wanewall
