#include "io/scene/resolution.hpp"

#include <algorithm>
#include <cmath>
#include <complex>
#include <limits>

#include "geometry/constants.hpp"

namespace wanewall::scene {

WaveIn wave_in(const Medium& medium, double frequency_hz) {
  using Complex = std::complex<double>;
  const double omega = 2.0 * pi * frequency_hz;
  const Complex eps_rel(medium.permittivity_rel, -medium.conductivity_s_per_m / (omega * eps0_f_per_m));
  const Complex mu_rel(medium.permeability_rel,
                       -medium.magnetic_conductivity_ohm_per_m / (omega * mu0_h_per_m));
  const Complex k_squared = eps_rel * mu_rel;  // in units of (omega / c0)^2
  const Complex k = omega / c0_m_per_s * std::sqrt(k_squared);
  WaveIn wave;
  wave.wavelength_m = 2.0 * pi / std::abs(k.real());
  wave.depth_m = k.imag() == 0.0 ? std::numeric_limits<double>::infinity() : 1.0 / std::abs(k.imag());
  wave.loss_tangent = k_squared.real() > 0.0 ? std::abs(k_squared.imag()) / k_squared.real()
                                             : std::numeric_limits<double>::infinity();
  return wave;
}

std::vector<int> media_in_use(const Problem& problem) {
  std::vector<bool> used(problem.media.size(), false);
  used[static_cast<std::size_t>(problem.background)] = true;
  for (const Object& object : problem.objects) used[static_cast<std::size_t>(object.medium)] = true;
  std::vector<int> list;
  for (std::size_t m = 0; m < used.size(); ++m)
    if (used[m]) list.push_back(static_cast<int>(m));
  return list;
}

double coarsest_cell_m(const Lattice& lattice) {
  double coarsest = 0.0;
  for (Axis a : all_axes) {
    if (lattice.periodic[static_cast<std::size_t>(index_of(a))] && lattice.cells(a) == 1) continue;
    coarsest = std::max(coarsest, lattice.along(a).largest_cell_m());
  }
  return coarsest;
}

}  // namespace wanewall::scene
