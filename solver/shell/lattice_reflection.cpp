#include "solver/shell/lattice_reflection.hpp"

#include <cmath>
#include <stdexcept>

#include "geometry/constants.hpp"
#include "solver/shell/stretch.hpp"

namespace wanewall {
namespace {

using Complex = std::complex<double>;
constexpr Complex j{0.0, 1.0};

/// exp(j k d): one cell back towards where the wave comes from.
Complex one_cell_back(Complex normal_k_squared_per_m2, double spacing_m) {
  return std::exp(j * wavenumber_of_lattice(normal_k_squared_per_m2, spacing_m) * spacing_m);
}

/// The reflection that follows from E on the face's node and one cell in front of it.
Complex from_two_nodes(Complex at_face, Complex before, Complex back) {
  return (at_face * back - before) / (before - at_face / back);
}

/// Keeps a linear recursion from overflowing in thick layers.
void rescale(Complex& e, Complex& h) {
  const double size = std::abs(e) + std::abs(h);
  e /= size;
  h /= size;
}

}  // namespace

double lattice_omega(double omega_rad_per_s, double dt_s) {
  return 2.0 / dt_s * std::sin(0.5 * omega_rad_per_s * dt_s);
}

Complex wavenumber_of_lattice(Complex lattice_k_squared_per_m2, double spacing_m) {
  const Complex k = 2.0 / spacing_m * std::asin(0.5 * spacing_m * std::sqrt(lattice_k_squared_per_m2));
  const bool decays = k.imag() < -1e-12 * std::abs(k);
  const bool grows = k.imag() > 1e-12 * std::abs(k);
  return grows || (!decays && k.real() < 0.0) ? -k : k;
}

LatticeMedium lattice_medium(const Medium& medium, double omega_rad_per_s, double dt_s) {
  const Complex j_omega = j * lattice_omega(omega_rad_per_s, dt_s);
  const double mean = std::cos(0.5 * omega_rad_per_s * dt_s);
  return {j_omega * eps0_f_per_m * medium.permittivity_rel + mean * medium.conductivity_s_per_m,
          j_omega * mu0_h_per_m * medium.permeability_rel + mean * medium.magnetic_conductivity_ohm_per_m};
}

FaceWave wave_at_angle(const Medium& medium, double omega_rad_per_s, double dt_s, double theta_rad,
                       Polarisation polarisation) {
  const double sine = std::sin(theta_rad);
  return {omega_rad_per_s, lattice_medium(medium, omega_rad_per_s, dt_s).k_squared_per_m2() * (sine * sine),
          polarisation};
}

FaceWave wave_that_decays(const Medium& medium, double omega_rad_per_s, double dt_s, double decay_per_m,
                          double spacing_m, Polarisation polarisation) {
  const double k = 2.0 / spacing_m * std::sinh(0.5 * decay_per_m * spacing_m);
  return {omega_rad_per_s, lattice_medium(medium, omega_rad_per_s, dt_s).k_squared_per_m2() + k * k,
          polarisation};
}

Complex face_reflection(const Face& face, const Medium& medium, double spacing_m, double dt_s,
                        const FaceWave& wave) {
  const double omega = wave.omega_rad_per_s;
  const auto normal_k_squared = [&] {
    return lattice_medium(medium, omega, dt_s).k_squared_per_m2() - wave.transverse_k_squared_per_m2;
  };
  switch (face.kind) {
    case FaceKind::moebius:
      return layer_reflection(face.moebius, spacing_m, dt_s, omega, normal_k_squared());
    case FaceKind::cfs_pml:
      return layer_reflection(face.layer, spacing_m, dt_s, omega, normal_k_squared());
    case FaceKind::matched_slab:
      return slab_reflection(face.layer, medium, spacing_m, dt_s, wave);
    case FaceKind::one_way:
      return one_way_reflection(face.one_way_order, medium, spacing_m, dt_s, wave);
    case FaceKind::electric_wall:
      return -1.0;
    case FaceKind::magnetic_wall:
      return 1.0;
    case FaceKind::periodic:
      break;
  }
  throw std::invalid_argument("a periodic face reflects nothing");
}

Complex layer_reflection(const LayerTable& layer, double spacing_m, double dt_s, double omega_rad_per_s,
                         Complex normal_k_squared_per_m2) {
  const Complex z_inverse = std::exp(-j * (omega_rad_per_s * dt_s));
  const auto stretch = [&](double sigma, double kappa, double alpha) {
    const Recursion r = layer_recursion(sigma, kappa, alpha, 1.0, dt_s);
    return 1.0 / (1.0 / kappa + r.c_per_m / (1.0 - r.b * z_inverse));
  };
  const Complex l = normal_k_squared_per_m2 * spacing_m * spacing_m;
  Complex e = 0.0, h = -1.0;
  for (std::size_t d = static_cast<std::size_t>(layer.cells()); d-- > 0;) {
    e -= stretch(layer.sigma_h_s_per_m[d], layer.kappa_h[d], layer.alpha_h_s_per_m[d]) * h;
    h += l * stretch(layer.sigma_e_s_per_m[d], layer.kappa_e[d], layer.alpha_e_s_per_m[d]) * e;
    rescale(e, h);
  }
  return from_two_nodes(e, e - h, one_cell_back(normal_k_squared_per_m2, spacing_m));
}

Complex layer_reflection(const MoebiusTable& layer, double spacing_m, double dt_s, double omega_rad_per_s,
                         Complex normal_k_squared_per_m2) {
  const Complex eps0_p = eps0_f_per_m * 2.0 / dt_s * j * std::tan(0.5 * omega_rad_per_s * dt_s);
  const Complex back = one_cell_back(normal_k_squared_per_m2, spacing_m);
  const Complex q = (back - 1.0) / (back + 1.0);  // j tan(k d/2)
  Complex product = 1.0;
  for (std::size_t d = 0; d < layer.kappa.size(); ++d) {
    const Complex s = layer.kappa[d] + layer.sigma_s_per_m[d] / (layer.alpha_s_per_m[d] + eps0_p);
    product *= (1.0 - s * q) / (1.0 + s * q);
  }
  return -product * product;
}

Complex slab_reflection(const LayerTable& layer, const Medium& medium, double spacing_m, double dt_s,
                        const FaceWave& wave) {
  const double omega = wave.omega_rad_per_s;
  const double mean = std::cos(0.5 * omega * dt_s);
  const LatticeMedium host = lattice_medium(medium, omega, dt_s);
  // The extra rate acts on eps E and mu H alike.
  const auto admittivity = [&](double sigma) {
    return host.admittivity_s_per_m + mean * sigma * medium.permittivity_rel;
  };
  const auto impedivity = [&](double sigma) {
    return host.impedivity_ohm_per_m + mean * sigma / eps0_f_per_m * mu0_h_per_m * medium.permeability_rel;
  };
  const Complex kt2 = wave.transverse_k_squared_per_m2;
  const bool te = wave.polarisation == Polarisation::te;
  const auto along_half = [&](double sigma) {
    return impedivity(sigma) + (te ? Complex{} : kt2 / admittivity(sigma));
  };
  const auto along_node = [&](double sigma) {
    return admittivity(sigma) + (te ? kt2 / impedivity(sigma) : Complex{});
  };
  Complex e = 0.0, h = 1.0;  // at the wall; h counts towards it
  for (std::size_t d = static_cast<std::size_t>(layer.cells()); d-- > 0;) {
    e += spacing_m * along_half(layer.sigma_h_s_per_m[d]) * h;
    h += spacing_m * along_node(layer.sigma_e_s_per_m[d]) * e;
    const double admittance = std::sqrt(std::abs(host.admittivity_s_per_m / host.impedivity_ohm_per_m));
    const double size = admittance * std::abs(e) + std::abs(h);
    e /= size;
    h /= size;
  }
  const Complex before = e + spacing_m * along_half(0.0) * h;
  return from_two_nodes(e, before, one_cell_back(host.k_squared_per_m2() - kt2, spacing_m));
}

Complex one_way_reflection(int order, const Medium& medium, double spacing_m, double dt_s,
                           const FaceWave& wave) {
  const double d = spacing_m;
  const double step_m =
      c0_m_per_s * dt_s / std::sqrt(medium.permittivity_rel * medium.permeability_rel);  // c dt
  const double a = (step_m - d) / (step_m + d);
  const Complex z = std::exp(j * (wave.omega_rad_per_s * dt_s));
  const Complex host_k2 = lattice_medium(medium, wave.omega_rad_per_s, dt_s).k_squared_per_m2();
  const Complex kt2 = wave.transverse_k_squared_per_m2;
  const Complex back = one_cell_back(host_k2 - kt2, spacing_m);
  // The update as  wall E0 = inside E1.
  Complex wall = z + a, inside = 1.0 + a * z;
  if (order == 2) {
    const Complex sum = 2.0 * d / (step_m + d) - d * step_m * step_m / (2.0 * (step_m + d)) * kt2;
    wall = z - a / z - sum;
    inside = -1.0 / z + a * z + sum;
  }
  return -(wall - inside * back) / (wall - inside / back);
}

}  // namespace wanewall
