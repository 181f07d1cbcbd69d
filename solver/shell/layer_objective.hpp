// The value of a layer's table on a set of points, and its gradient.
#pragma once

#include <Eigen/Core>
#include <functional>
#include <vector>

#include "solver/shell/design_points.hpp"
#include "solver/shell/layer_table.hpp"

namespace wanewall {

/// A function of unbounded unknowns y. Every parameter x lies between bounds, ln x = middle + half tanh(y).
/// Tables here are dimensionless: sigma eta0 d and alpha eta0 d.
class LayerObjective {
 public:
  explicit LayerObjective(std::vector<DesignPoints> points);
  virtual ~LayerObjective() = default;

  /// (1/norm) ln mean (w |R|)^norm; fills the gradient unless it is null.
  double value(const std::vector<double>& y, double norm, std::vector<double>* gradient) const;
  /// ln max w |R|.
  double largest(const std::vector<double>& y) const;

  virtual std::size_t unknowns() const = 0;
  /// A start of the search: number 0, 1, ..., with random numbers from `draw`.
  virtual std::vector<double> start(int number, const std::function<double()>& draw) const = 0;

 protected:
  using Array = Eigen::ArrayXd;
  /// The points of one frequency, and where they stand among all.
  struct Group {
    double k0, courant;
    Array q_re, q_im;
    Eigen::Index first, count;
  };
  const std::vector<Group>& groups() const { return groups_; }

  /// |R| at every point.
  virtual void reflections(const std::vector<double>& y, Array& magnitude) const = 0;
  /// Adds sum_i share_i d ln|R_i|/dy to the gradient. Called after `reflections` with the same y.
  virtual void add_gradient(const std::vector<double>& y, const Array& share,
                            std::vector<double>& gradient) const = 0;

 private:
  Array weighted_logarithms(const std::vector<double>& y) const;
  std::vector<Group> groups_;
  Array ln_weight_;
};

/// Bounds of one parameter's logarithm.
struct LogBounds {
  double lo, hi;
  double at(double y) const;           ///< the parameter
  double slope(double y) const;        ///< d ln(parameter)/dy
  double inverse(double value) const;  ///< y of a value, kept away from the bounds
};

}  // namespace wanewall
