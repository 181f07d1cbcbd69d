#include "solver/shell/lattice_reflection.hpp"

#include <cmath>

#include "solver/shell/stretch.hpp"

namespace wanewall {

using Complex = std::complex<double>;

double lattice_omega(double omega_rad_per_s, double dt_s) {
  return 2.0 / dt_s * std::sin(0.5 * omega_rad_per_s * dt_s);
}

Complex wavenumber_of_lattice(Complex lattice_k_squared_per_m2, double spacing_m) {
  const Complex k = 2.0 / spacing_m * std::asin(0.5 * spacing_m * std::sqrt(lattice_k_squared_per_m2));
  const bool decays = k.imag() < -1e-12 * std::abs(k);
  const bool grows = k.imag() > 1e-12 * std::abs(k);
  return grows || (!decays && k.real() < 0.0) ? -k : k;
}

Complex layer_reflection(const LayerTable& layer, double spacing_m, double dt_s, double omega_rad_per_s,
                         Complex normal_k_squared_per_m2) {
  const Complex z_inverse = std::exp(Complex(0.0, -omega_rad_per_s * dt_s));
  const auto stretch = [&](double sigma, double kappa, double alpha) {
    const Recursion r = layer_recursion(sigma, kappa, alpha, 1.0, dt_s);
    return 1.0 / (1.0 / kappa + r.c_per_m / (1.0 - r.b * z_inverse));
  };
  const Complex l = normal_k_squared_per_m2 * spacing_m * spacing_m;
  Complex e = 0.0, h = -1.0;
  for (std::size_t d = static_cast<std::size_t>(layer.cells()); d-- > 0;) {
    e -= stretch(layer.sigma_h_s_per_m[d], layer.kappa_h[d], layer.alpha_h_s_per_m[d]) * h;
    h += l * stretch(layer.sigma_e_s_per_m[d], layer.kappa_e[d], layer.alpha_e_s_per_m[d]) * e;
    const double size = std::abs(e) + std::abs(h);
    e /= size;
    h /= size;
  }
  const Complex before = e - h;  // E one cell in front of the layer
  const Complex p =
      std::exp(Complex(0.0, 1.0) * wavenumber_of_lattice(normal_k_squared_per_m2, spacing_m) * spacing_m);
  return (e * p - before) / (before - e / p);
}

}  // namespace wanewall
