#include "postproc/lattice_wave.hpp"

#include <cmath>
#include <stdexcept>

#include "geometry/constants.hpp"

namespace wanewall {
namespace {

using Complex = std::complex<double>;
constexpr Complex j{0.0, 1.0};

// K = (2/d) sin(k d/2).
Complex difference_wavenumber(Complex k, double spacing_m) {
  return (2.0 / spacing_m) * std::sin(0.5 * spacing_m * k);
}

}  // namespace

FaceMedium face_medium(double permittivity_rel, double permeability_rel, double conductivity_s_per_m,
                       double frequency_hz, double dt_s, double magnetic_conductivity_ohm_per_m) {
  const double half_angle = pi * frequency_hz * dt_s;  // omega dt / 2
  if (!(half_angle > 0.0 && half_angle < 0.5 * pi))
    throw std::invalid_argument("a frequency must lie between 0 and half a period per time step");
  const double big_omega = 2.0 / dt_s * std::sin(half_angle);
  FaceMedium medium;
  medium.omega_mu_ohm_per_m = {big_omega * mu0_h_per_m * permeability_rel,
                               -magnetic_conductivity_ohm_per_m * std::cos(half_angle)};
  medium.admittivity_s_per_m = {conductivity_s_per_m * std::cos(half_angle),
                                big_omega * eps0_f_per_m * permittivity_rel};
  medium.w2_per_m2 = -j * medium.omega_mu_ohm_per_m * medium.admittivity_s_per_m;
  return medium;
}

Complex outward_wavenumber(Complex normal_k_squared_per_m2, double spacing_m) {
  const Complex kz = (2.0 / spacing_m) * std::asin(0.5 * spacing_m * std::sqrt(normal_k_squared_per_m2));
  const bool decays = std::abs(kz.imag()) > 1e-13 * std::abs(kz);
  if (decays) return kz.imag() < 0.0 ? kz : -kz;
  return kz.real() > 0.0 ? kz : -kz;
}

Complex normal_wavenumber(const FaceMedium& medium, Complex transverse_per_m2, double spacing_m) {
  return outward_wavenumber(medium.w2_per_m2 + transverse_per_m2, spacing_m);
}

NormalFlux normal_flux(const FaceMedium& medium, Complex normal_rad_per_m, double spacing_m) {
  const Complex k_z = difference_wavenumber(normal_rad_per_m, spacing_m);
  const Complex half_cell_out = std::exp(-0.5 * spacing_m * j * normal_rad_per_m);
  const Complex te = k_z / medium.omega_mu_ohm_per_m;         // H_t / E_t with both on one plane
  const Complex tm = medium.admittivity_s_per_m / (j * k_z);  // likewise
  return {0.5 * (te * half_cell_out).real(), 0.5 * (te / half_cell_out).real(),
          0.5 * (tm * half_cell_out).real(), 0.5 * (tm / half_cell_out).real()};
}

}  // namespace wanewall
