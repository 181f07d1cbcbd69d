#include "solver/shell/continuum_reflection.hpp"

#include <cmath>
#include <functional>
#include <stdexcept>

#include "geometry/constants.hpp"

namespace wanewall {
namespace {

using Complex = std::complex<double>;
constexpr Complex j{0.0, 1.0};

/// The root that decays towards the face, else travels towards it.
Complex inward_root(Complex k_squared) {
  const Complex k = std::sqrt(k_squared);
  return k.imag() > 1e-12 * std::abs(k) ? -k : k;
}

/// Integral over the layer of f(sigma, kappa, alpha).
Complex integral(const LayerTable& layer, double spacing_m,
                 const std::function<Complex(double, double, double)>& f) {
  const int n = layer.cells();
  const auto beyond = [n](const std::vector<double>& e, const std::vector<double>& h, double least) {
    const auto d = static_cast<std::size_t>(n - 1);
    const double value = n > 1 ? 4.0 * h[d] - 6.0 * e[d] + 4.0 * h[d - 1] - e[d - 1] : 2.0 * h[d] - e[d];
    return value >= least ? value : h[d];
  };
  const auto at_e = [&](int d) {
    const auto i = static_cast<std::size_t>(d);
    return d < n ? f(layer.sigma_e_s_per_m[i], layer.kappa_e[i], layer.alpha_e_s_per_m[i])
                 : f(beyond(layer.sigma_e_s_per_m, layer.sigma_h_s_per_m, 0.0),
                     beyond(layer.kappa_e, layer.kappa_h, 1.0),
                     beyond(layer.alpha_e_s_per_m, layer.alpha_h_s_per_m, 0.0));
  };
  Complex sum = 0.0;
  for (int d = 0; d < n; ++d) {
    const auto i = static_cast<std::size_t>(d);
    const Complex middle = f(layer.sigma_h_s_per_m[i], layer.kappa_h[i], layer.alpha_h_s_per_m[i]);
    sum += spacing_m / 6.0 * (at_e(d) + 4.0 * middle + at_e(d + 1));
  }
  return sum;
}

/// k^2 with an extra loss rate [1/s] on eps E and mu H alike.
Complex k_squared(const Medium& medium, double omega, double extra_rate_per_s) {
  const Complex rate = j * omega + extra_rate_per_s;
  return -(rate * eps0_f_per_m * medium.permittivity_rel + medium.conductivity_s_per_m) *
         (rate * mu0_h_per_m * medium.permeability_rel + medium.magnetic_conductivity_ohm_per_m);
}

}  // namespace

Complex continuum_k_squared(const Medium& medium, double omega_rad_per_s) {
  return k_squared(medium, omega_rad_per_s, 0.0);
}

Complex continuum_reflection(const Face& face, const Medium& medium, double spacing_m, double omega_rad_per_s,
                             Complex normal_k_squared_per_m2) {
  const Complex k_normal = inward_root(normal_k_squared_per_m2);
  const Complex j_omega = j * omega_rad_per_s;
  const auto stretch = [&](double sigma, double kappa, double alpha) {
    return kappa + sigma / (alpha + j_omega * eps0_f_per_m);
  };
  switch (face.kind) {
    case FaceKind::moebius: {
      Complex depth = 0.0;
      for (std::size_t d = 0; d < face.moebius.kappa.size(); ++d)
        depth += spacing_m *
                 stretch(face.moebius.sigma_s_per_m[d], face.moebius.kappa[d], face.moebius.alpha_s_per_m[d]);
      return -std::exp(-2.0 * j * k_normal * depth);
    }
    case FaceKind::cfs_pml:
      return -std::exp(-2.0 * j * k_normal * integral(face.layer, spacing_m, stretch));
    case FaceKind::matched_slab: {
      const Complex kn2 = normal_k_squared_per_m2, k2 = continuum_k_squared(medium, omega_rad_per_s);
      return -std::exp(-2.0 * j * integral(face.layer, spacing_m, [&](double sigma, double, double) {
        return inward_root(k_squared(medium, omega_rad_per_s, sigma / eps0_f_per_m) - k2 + kn2);
      }));
    }
    case FaceKind::one_way: {
      const Complex cosine = k_normal / inward_root(continuum_k_squared(medium, omega_rad_per_s));
      const Complex first = (cosine - 1.0) / (cosine + 1.0);
      return face.one_way_order == 2 ? -first * first : first;
    }
    case FaceKind::electric_wall:
      return -1.0;
    case FaceKind::magnetic_wall:
      return 1.0;
    case FaceKind::periodic:
      break;
  }
  throw std::invalid_argument("a periodic face reflects nothing");
}

}  // namespace wanewall
