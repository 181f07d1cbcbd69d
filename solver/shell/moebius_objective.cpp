#include "solver/shell/moebius_objective.hpp"

#include <algorithm>
#include <cmath>
#include <complex>
#include <numeric>

#include "geometry/constants.hpp"

namespace wanewall {
namespace {

using Complex = std::complex<double>;

/// alpha that counts as none: far below every frequency.
constexpr double no_alpha = 1e-18;
constexpr double alpha_max = 10.0;

double im_p(double k0, double courant) {
  return 2.0 / courant * std::tan(0.5 * k0 * courant);
}

}  // namespace

MoebiusObjective::MoebiusObjective(std::vector<DesignPoints> points, int cells, double alpha_min,
                                   double largest_index)
    : LayerObjective(std::move(points)),
      n_(static_cast<std::size_t>(cells)),
      largest_index_(largest_index),
      kappa_{std::log(0.1), std::log(60.0)},
      g_{-9.0, 7.0},
      alpha_{std::log(std::max(alpha_min, no_alpha)), std::log(alpha_min > 0.0 ? alpha_max : no_alpha)} {}

MoebiusObjective::Cells MoebiusObjective::cells_at(const std::vector<double>& y) const {
  Cells cells;
  for (std::size_t j = 0; j < n_; ++j) {
    cells.kappa.push_back(kappa_.at(y[j]));
    cells.g.push_back(g_.at(y[n_ + j]));
    cells.alpha.push_back(alpha_.at(y[2 * n_ + j]));
  }
  return cells;
}

void MoebiusObjective::reflections(const std::vector<double>& y, Array& magnitude) const {
  const Cells cells = cells_at(y);
  magnitude.setOnes();
  for (const Group& group : groups()) {
    const Complex p(0.0, im_p(group.k0, group.courant));
    auto out = magnitude.segment(group.first, group.count);
    for (std::size_t j = 0; j < n_; ++j) {
      const Complex s = cells.kappa[j] + 2.0 * cells.g[j] / (cells.alpha[j] + p);
      const Array u_re = s.real() * group.q_re - s.imag() * group.q_im;
      const Array u_im2 = (s.real() * group.q_im + s.imag() * group.q_re).square();
      out *= ((1.0 - u_re).square() + u_im2) / ((1.0 + u_re).square() + u_im2);
    }
  }
}

void MoebiusObjective::add_gradient(const std::vector<double>& y, const Array& share,
                                    std::vector<double>& gradient) const {
  const Cells cells = cells_at(y);
  for (const Group& group : groups()) {
    const Complex p(0.0, im_p(group.k0, group.courant));
    const auto part = share.segment(group.first, group.count);
    for (std::size_t j = 0; j < n_; ++j) {
      const Complex pole = 1.0 / (cells.alpha[j] + p), loss = 2.0 * cells.g[j] * pole;
      const Complex s = cells.kappa[j] + loss;
      const Array u_re = s.real() * group.q_re - s.imag() * group.q_im;
      const Array u_im = s.real() * group.q_im + s.imag() * group.q_re;
      // d ln|R|/ds = Re( -4 q/(1 - u^2) ds ), with b = 1 - u^2.
      const Array b_re = 1.0 - u_re.square() + u_im.square(), b_im = -2.0 * u_re * u_im;
      const Array scale = part / (b_re.square() + b_im.square() + 1e-24);
      const Complex t = -4.0 * Complex(((group.q_re * b_re + group.q_im * b_im) * scale).sum(),
                                       ((group.q_im * b_re - group.q_re * b_im) * scale).sum());
      gradient[j] += (t * cells.kappa[j]).real() * kappa_.slope(y[j]);
      gradient[n_ + j] += (t * loss).real() * g_.slope(y[n_ + j]);
      gradient[2 * n_ + j] -= (t * loss * pole * cells.alpha[j]).real() * alpha_.slope(y[2 * n_ + j]);
    }
  }
}

std::vector<double> MoebiusObjective::start(int number, const std::function<double()>& draw) const {
  std::vector<double> y(unknowns());
  const double first = std::log(1.0 / largest_index_), last = std::log(number % 2 == 1 ? 10.0 : 3.0);
  const double slow = std::max(2.0 * std::exp(alpha_.lo), 0.003);
  for (std::size_t j = 0; j < n_; ++j) {
    const double depth = n_ > 1 ? static_cast<double>(j) / static_cast<double>(n_ - 1) : 0.0;
    y[j] = kappa_.inverse(0.2 * std::pow(15.0, draw()));
    y[n_ + j] = g_.inverse(std::exp(first + (last - first) * depth + 0.6 * (draw() - 0.5)));
    y[2 * n_ + j] = alpha_.inverse(slow * std::pow(0.4 / slow, draw()));
  }
  return y;
}

MoebiusTable MoebiusObjective::table(const std::vector<double>& y, double spacing_m) const {
  const Cells cells = cells_at(y);
  std::vector<std::size_t> order(n_);
  std::iota(order.begin(), order.end(), std::size_t{0});
  std::sort(order.begin(), order.end(), [&](std::size_t a, std::size_t b) {
    return cells.alpha[a] != cells.alpha[b] ? cells.alpha[a] < cells.alpha[b] : cells.g[a] < cells.g[b];
  });
  MoebiusTable table;
  const bool with_alpha = alpha_.hi > alpha_.lo;
  for (std::size_t j : order) {
    table.kappa.push_back(cells.kappa[j]);
    table.sigma_s_per_m.push_back(2.0 * cells.g[j] / (eta0_ohm * spacing_m));
    table.alpha_s_per_m.push_back(with_alpha ? cells.alpha[j] / (eta0_ohm * spacing_m) : 0.0);
  }
  return table;
}

}  // namespace wanewall
