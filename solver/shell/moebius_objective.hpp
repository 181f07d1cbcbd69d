// A Moebius layer's reflection on a design's points.
#pragma once

#include "solver/shell/layer_objective.hpp"

namespace wanewall {

/// Unknowns: kappa of all cells, then g = sigma eta0 d/2, then alpha eta0 d. |R| = prod |(1 - s q)/(1 + s
/// q)|^2.
class MoebiusObjective : public LayerObjective {
 public:
  /// alpha between `alpha_min` and 10; both zero holds it at zero.
  MoebiusObjective(std::vector<DesignPoints> points, int cells, double alpha_min, double largest_index);
  std::size_t unknowns() const override { return 3 * n_; }
  std::vector<double> start(int number, const std::function<double()>& draw) const override;
  /// The table in SI units, cells ordered by alpha: the slow ones inside.
  MoebiusTable table(const std::vector<double>& y, double spacing_m) const;

 protected:
  void reflections(const std::vector<double>& y, Array& magnitude) const override;
  void add_gradient(const std::vector<double>& y, const Array& share,
                    std::vector<double>& gradient) const override;

 private:
  struct Cells {
    std::vector<double> kappa, g, alpha;
  };
  Cells cells_at(const std::vector<double>& y) const;
  std::size_t n_;
  double largest_index_;
  LogBounds kappa_, g_, alpha_;
};

}  // namespace wanewall
