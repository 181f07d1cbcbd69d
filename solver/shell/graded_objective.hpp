// A cfs_pml layer's reflection on a design's points.
#pragma once

#include <complex>
#include <functional>
#include <vector>

#include "solver/shell/layer_objective.hpp"

namespace wanewall {

/// Unknowns: sigma eta0 d, kappa - 1 and alpha eta0 d, each of all E nodes and then of all half nodes. R by
/// the recursion of lattice_reflection.hpp, its derivatives by the adjoint of that recursion.
class GradedObjective : public LayerObjective {
 public:
  GradedObjective(std::vector<DesignPoints> points, int cells, double alpha_min);
  std::size_t unknowns() const override { return 6 * n_; }
  std::vector<double> start(int number, const std::function<double()>& draw) const override;
  LayerTable table(const std::vector<double>& y, double spacing_m) const;

 protected:
  void reflections(const std::vector<double>& y, Array& magnitude) const override;
  void add_gradient(const std::vector<double>& y, const Array& share,
                    std::vector<double>& gradient) const override;

 private:
  /// Complex numbers of one group's points.
  struct Numbers {
    std::vector<double> re, im;
  };
  static void append(Numbers& numbers, std::complex<double> value);
  static std::complex<double> number(const Numbers& numbers, std::size_t i);
  /// Of one group: K_n^2 d^2 and exp(j k d).
  struct Waves {
    Numbers l, back;
  };
  /// The layer's response at one frequency: s at 2 n places, and ds/d ln of each of the three parameters.
  struct Response {
    std::vector<std::complex<double>> s, by_sigma, by_kappa, by_alpha;
  };
  Response response(const std::vector<double>& y, const Group& group, bool with_slopes) const;
  /// E and H of the recursion at every cell, outermost first; `e` and `h` end in front of the layer.
  void recur(const Waves& waves, const Response& r, std::vector<Numbers>& e, std::vector<Numbers>& h) const;
  std::size_t n_;
  LogBounds sigma_, kappa_less_1_, alpha_;
  std::vector<Waves> waves_;
};

}  // namespace wanewall
