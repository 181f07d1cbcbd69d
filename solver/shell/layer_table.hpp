// The numbers of one absorbing layer: conductivity, stretch and frequency shift at every E node and half
// node.
#pragma once

#include <vector>

namespace wanewall {

/// Entry d of the _e tables is the E node d cells deep (0: the layer's first node, where it meets the clear
/// volume); entry d of the _h tables is the half node d + 1/2 cells deep. All six have one entry per cell;
/// the node at the outer wall needs none.
///   s = kappa + sigma / (alpha + j omega eps0)   (M. Kuzuoglu and R. Mittra, IEEE Microw. Guided Wave Lett.
///   6, 447 (1996))
struct LayerTable {
  std::vector<double> sigma_e_s_per_m, sigma_h_s_per_m;
  std::vector<double> kappa_e, kappa_h;
  std::vector<double> alpha_e_s_per_m, alpha_h_s_per_m;
  int cells() const { return static_cast<int>(sigma_e_s_per_m.size()); }
  bool operator==(const LayerTable&) const = default;
};

/// Cell d of a Moebius layer lies between its nodes d and d + 1, counted outwards; node 0 is the layer's
/// first node. A cell multiplies a wave of the lattice by  (1 - s q)/(1 + s q),  q = j tan(k_n d/2), with
///   s = kappa + sigma / (alpha + eps0 p),   p = (2/dt) (1 - z^-1)/(1 + z^-1),   z = exp(j omega dt).
/// kappa > 0, sigma >= 0, alpha >= 0. The order of the cells does not matter.
///   Sources of the idea: A. Chern, J. Comput. Phys. 381, 91 (2019); M. N. Guddati and K.-W. Lim, Int. J.
///   Numer. Meth. Eng. 66, 949 (2006). The form for the Yee lattice is this project's own.
struct MoebiusTable {
  std::vector<double> kappa, sigma_s_per_m, alpha_s_per_m;
  int cells() const { return static_cast<int>(kappa.size()); }
  bool operator==(const MoebiusTable&) const = default;
};

/// Polynomial grading: sigma = sigma_max u^order, kappa = 1 + (kappa_max - 1) u^order, alpha = alpha_max
/// (1 - u)^alpha_order, u = depth / thickness.
///   Sources: J.-P. Berenger, J. Comput. Phys. 114, 185 (1994); S. D. Gedney, IEEE Trans. Antennas Propag.
///   44, 1630 (1996); J. A. Roden and S. D. Gedney, Microw. Opt. Technol. Lett. 27, 334 (2000).
struct PolynomialGrading {
  double order = 3.0;
  double sigma_max_s_per_m = 0.0;
  double kappa_max = 1.0;
  double alpha_max_s_per_m = 0.0;
  double alpha_order = 1.0;
};
LayerTable polynomial_layer(const PolynomialGrading& grading, int cells);

/// sigma_max for a wanted reflection R(0) at normal incidence in the continuum: -(order + 1) ln R / (2 eta L)
/// with the vacuum's eta and thickness L [m]. The lattice does worse than R for strong layers. 0 < r0 < 1.
double sigma_max_for_reflection(double r0, double order, double thickness_m);

/// 0.8 (order + 1) / (eta0 d sqrt(eps_r)): Gedney's rule for a cell d [m] in a host of relative permittivity
/// eps_r.
double sigma_max_rule(double order, double cell_m, double permittivity_rel);

}  // namespace wanewall
