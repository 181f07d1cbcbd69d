#include "solver/shell/minimise.hpp"

#include <Eigen/Core>
#include <cmath>
#include <limits>

namespace wanewall {
namespace {

using Vector = Eigen::VectorXd;

constexpr double armijo = 1e-4, curvature = 0.9;
constexpr int most_trials = 25;
/// One short step says little: so many in a row end the search.
constexpr int most_idle_steps = 5;
/// Longest first step, in units of x: far from the minimum the model of the function is not to be trusted.
constexpr double longest_step = 1.0, longest_first_step = 0.1;

}  // namespace

double minimise(const SmoothFunction& f, std::vector<double>& x_out, int most_steps, double least_gain) {
  const auto n = static_cast<Eigen::Index>(x_out.size());
  std::vector<double> gradient_out(x_out.size()), trial_out(x_out.size());
  Eigen::Map<Vector> x(x_out.data(), n), new_gradient(gradient_out.data(), n), trial(trial_out.data(), n);
  double value = f(x_out, gradient_out);
  Vector gradient = new_gradient;
  Eigen::MatrixXd inverse = Eigen::MatrixXd::Identity(n, n);  // of the second derivatives
  bool fresh = true;
  int idle = 0;
  const auto restart = [&] {
    inverse.setIdentity();
    fresh = true;
  };
  for (int step = 0; step < most_steps; ++step) {
    Vector direction = -(inverse * gradient);
    double slope = direction.dot(gradient);
    if (slope >= 0.0) {
      restart();
      direction = -gradient;
      slope = -gradient.squaredNorm();
    }
    if (-slope < 1e-12) break;
    const double reach = direction.cwiseAbs().maxCoeff();
    double length = std::min(1.0, (fresh ? longest_first_step : longest_step) / reach);
    double below = 0.0, above = std::numeric_limits<double>::infinity(), new_value = value;
    bool falls = false;
    for (int t = 0; t < most_trials; ++t) {
      trial = x + length * direction;
      new_value = f(trial_out, gradient_out);
      if (!(new_value <= value + armijo * length * slope)) {
        above = length;
      } else {
        falls = true;
        if (new_gradient.dot(direction) >= curvature * slope) break;
        below = length;
      }
      length = std::isfinite(above) ? 0.5 * (below + above) : 2.0 * length;
    }
    if (!falls || !(new_value < value)) {
      if (fresh) break;
      restart();
      continue;
    }
    const Vector moved = trial - x, turned = new_gradient - gradient;
    const double gain = value - new_value, along = moved.dot(turned);
    x = trial;
    value = new_value;
    gradient = new_gradient;
    if (along > 1e-14) {
      if (fresh) inverse.diagonal().setConstant(along / turned.squaredNorm());
      const Vector image = inverse * turned;
      const double scale = (1.0 + turned.dot(image) / along) / along;
      inverse +=
          scale * moved * moved.transpose() - (image * moved.transpose() + moved * image.transpose()) / along;
      fresh = false;
    }
    idle = gain < least_gain ? idle + 1 : 0;
    if (idle == most_idle_steps) break;
  }
  return value;
}

double SplitMix::next() {
  state_ += 0x9E3779B97F4A7C15ULL;
  std::uint64_t z = state_;
  z = (z ^ (z >> 30)) * 0xBF58476D1CE4E5B9ULL;
  z = (z ^ (z >> 27)) * 0x94D049BB133111EBULL;
  z ^= z >> 31;
  return static_cast<double>(z >> 11) / 9007199254740992.0;
}

}  // namespace wanewall
