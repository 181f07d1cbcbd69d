// Minimum of a smooth function of a few dozen unknowns.
#pragma once

#include <cstdint>
#include <functional>
#include <vector>

namespace wanewall {

/// Value at x; fills the gradient, which has the size of x.
using SmoothFunction = std::function<double(const std::vector<double>& x, std::vector<double>& gradient)>;

/// Moves x downhill by the BFGS method with a line search for the weak Wolfe conditions, until five
/// steps in a row gain less than `least_gain` each or `most_steps` are done; returns the value there. Finds a
/// local minimum. The same input gives the same bits.
///   Sources: J. Nocedal and S. J. Wright, Numerical Optimization, 2nd ed., ch. 3 and 6; the line search by
///   bisection is that of A. S. Lewis and M. L. Overton, Math. Program. 141, 135 (2013).
double minimise(const SmoothFunction& f, std::vector<double>& x, int most_steps, double least_gain);

/// Random numbers that are the same everywhere, unlike the standard library's distributions.
///   Source: G. L. Steele, D. Lea and C. H. Flood, Proc. OOPSLA, 453 (2014) (splitmix64).
class SplitMix {
 public:
  explicit SplitMix(std::uint64_t seed) : state_(seed) {}
  /// Uniform in [0, 1).
  double next();

 private:
  std::uint64_t state_;
};

}  // namespace wanewall
