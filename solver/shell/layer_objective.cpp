#include "solver/shell/layer_objective.hpp"

#include <algorithm>
#include <cmath>

namespace wanewall {

LayerObjective::LayerObjective(std::vector<DesignPoints> points) {
  Eigen::Index total = 0;
  for (const DesignPoints& p : points) total += static_cast<Eigen::Index>(p.weight.size());
  ln_weight_.resize(total);
  Eigen::Index first = 0;
  for (const DesignPoints& p : points) {
    const auto count = static_cast<Eigen::Index>(p.weight.size());
    const auto as_array = [count](const std::vector<double>& v) {
      return Array(Eigen::Map<const Array>(v.data(), count));
    };
    groups_.push_back({p.k0, p.courant, as_array(p.q_re), as_array(p.q_im), first, count});
    ln_weight_.segment(first, count) = as_array(p.weight).max(1e-30).log();
    first += count;
  }
}

Eigen::ArrayXd LayerObjective::weighted_logarithms(const std::vector<double>& y) const {
  Array magnitude(ln_weight_.size());
  reflections(y, magnitude);
  return (magnitude + 1e-30).log() + ln_weight_;
}

double LayerObjective::value(const std::vector<double>& y, double norm, std::vector<double>* gradient) const {
  const Array logs = weighted_logarithms(y);
  const double largest = logs.maxCoeff();
  Array share = (norm * (logs - largest)).exp();
  const double sum = share.sum();
  if (gradient != nullptr) {
    share /= sum;
    gradient->assign(y.size(), 0.0);
    add_gradient(y, share, *gradient);
  }
  return largest + std::log(sum / static_cast<double>(logs.size())) / norm;
}

double LayerObjective::largest(const std::vector<double>& y) const {
  return weighted_logarithms(y).maxCoeff();
}

double LogBounds::at(double y) const {
  return std::exp(lo + 0.5 * (hi - lo) * (1.0 + std::tanh(y)));
}

double LogBounds::slope(double y) const {
  const double t = std::tanh(y);
  return 0.5 * (hi - lo) * (1.0 - t * t);
}

double LogBounds::inverse(double value) const {
  if (!(hi > lo)) return 0.0;
  return std::atanh(std::clamp(2.0 * (std::log(value) - lo) / (hi - lo) - 1.0, -0.999, 0.999));
}

}  // namespace wanewall
