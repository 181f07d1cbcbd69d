#include "solver/shell/layer_table.hpp"

#include <cmath>

#include "geometry/constants.hpp"

namespace wanewall {

LayerTable polynomial_layer(const PolynomialGrading& grading, int cells) {
  LayerTable table;
  const auto fill = [&](double offset, std::vector<double>& sigma, std::vector<double>& kappa,
                        std::vector<double>& alpha) {
    for (int d = 0; d < cells; ++d) {
      const double u = (d + offset) / cells;
      const double power = u > 0.0 ? std::pow(u, grading.order) : 0.0;
      sigma.push_back(grading.sigma_max_s_per_m * power);
      kappa.push_back(1.0 + (grading.kappa_max - 1.0) * power);
      alpha.push_back(grading.alpha_max_s_per_m * std::pow(1.0 - u, grading.alpha_order));
    }
  };
  fill(0.0, table.sigma_e_s_per_m, table.kappa_e, table.alpha_e_s_per_m);
  fill(0.5, table.sigma_h_s_per_m, table.kappa_h, table.alpha_h_s_per_m);
  return table;
}

double sigma_max_for_reflection(double r0, double order, double thickness_m) {
  return -(order + 1.0) * std::log(r0) / (2.0 * eta0_ohm * thickness_m);
}

double sigma_max_rule(double order, double cell_m, double permittivity_rel) {
  return 0.8 * (order + 1.0) / (eta0_ohm * cell_m * std::sqrt(permittivity_rel));
}

}  // namespace wanewall
