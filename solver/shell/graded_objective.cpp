#include "solver/shell/graded_objective.hpp"

#include <algorithm>
#include <cmath>
#include <complex>

#include "geometry/constants.hpp"

namespace wanewall {
namespace {

using Complex = std::complex<double>;
constexpr double no_alpha = 1e-18;
constexpr double alpha_max = 10.0;

}  // namespace

void GradedObjective::append(Numbers& numbers, Complex value) {
  numbers.re.push_back(value.real());
  numbers.im.push_back(value.imag());
}

Complex GradedObjective::number(const Numbers& numbers, std::size_t i) {
  return {numbers.re[i], numbers.im[i]};
}

GradedObjective::GradedObjective(std::vector<DesignPoints> points, int cells, double alpha_min)
    : LayerObjective(std::move(points)),
      n_(static_cast<std::size_t>(cells)),
      sigma_{-12.0, 4.0},
      kappa_less_1_{-8.0, std::log(99.0)},
      alpha_{std::log(std::max(alpha_min, no_alpha)), std::log(alpha_min > 0.0 ? alpha_max : no_alpha)} {
  for (const Group& group : groups()) {
    Waves waves;
    for (Eigen::Index i = 0; i < group.count; ++i) {
      const Complex q(group.q_re[i], group.q_im[i]), back = (1.0 + q) / (1.0 - q);
      append(waves.back, back);
      append(waves.l, 2.0 - back - 1.0 / back);
    }
    waves_.push_back(std::move(waves));
  }
}

GradedObjective::Response GradedObjective::response(const std::vector<double>& y, const Group& group,
                                                    bool with_slopes) const {
  // v = 1/s = 1/kappa + sigma/kappa^2 G,  G = (b - 1)/(t (1 - b z^-1)),  b = exp(-t S),  t = sigma/kappa +
  // alpha.
  const double step = group.courant;
  const Complex zi = std::exp(Complex(0.0, -group.k0 * step));
  const std::size_t places = 2 * n_;
  Response r;
  r.s.resize(places);
  if (with_slopes)
    for (auto* v : {&r.by_sigma, &r.by_kappa, &r.by_alpha}) v->resize(places);
  for (std::size_t i = 0; i < places; ++i) {
    const double sigma = sigma_.at(y[i]), more = kappa_less_1_.at(y[places + i]), kappa = 1.0 + more;
    const double alpha = alpha_.at(y[2 * places + i]);
    const double t = sigma / kappa + alpha, b_less_1 = std::expm1(-t * step), b = 1.0 + b_less_1;
    const Complex below = t * (1.0 - b * zi), g = b_less_1 / below;
    const double weight = sigma / (kappa * kappa);
    const Complex s = 1.0 / (1.0 / kappa + weight * g);
    r.s[i] = s;
    if (!with_slopes) continue;
    const Complex g_by_t = (-step * b - g * (1.0 - b * zi + t * step * b * zi)) / below;
    const Complex v_by_sigma = g / (kappa * kappa) + weight / kappa * g_by_t;
    const Complex v_by_kappa = -1.0 / (kappa * kappa) - 2.0 * weight / kappa * g - weight * weight * g_by_t;
    const Complex v_by_alpha = weight * g_by_t;
    const Complex minus_s2 = -s * s;
    r.by_sigma[i] = minus_s2 * v_by_sigma * sigma * sigma_.slope(y[i]);
    r.by_kappa[i] = minus_s2 * v_by_kappa * more * kappa_less_1_.slope(y[places + i]);
    r.by_alpha[i] = minus_s2 * v_by_alpha * alpha * alpha_.slope(y[2 * places + i]);
  }
  return r;
}

void GradedObjective::recur(const Waves& waves, const Response& r, std::vector<Numbers>& e,
                            std::vector<Numbers>& h) const {
  const std::size_t count = waves.l.re.size();
  const double *lr = waves.l.re.data(), *li = waves.l.im.data();
  e.assign(n_ + 1, {std::vector<double>(count, 0.0), std::vector<double>(count, 0.0)});
  h.assign(n_ + 1, {std::vector<double>(count, -1.0), std::vector<double>(count, 0.0)});
  for (std::size_t step = 0; step < n_; ++step) {
    const std::size_t d = n_ - 1 - step;
    const double ar = r.s[n_ + d].real(), ai = r.s[n_ + d].imag();
    const double br = r.s[d].real(), bi = r.s[d].imag();
    const double *er = e[step].re.data(), *ei = e[step].im.data();
    const double *hr = h[step].re.data(), *hi = h[step].im.data();
    double *next_er = e[step + 1].re.data(), *next_ei = e[step + 1].im.data();
    double *next_hr = h[step + 1].re.data(), *next_hi = h[step + 1].im.data();
#pragma omp simd
    for (std::size_t i = 0; i < count; ++i) {
      const double new_er = er[i] - (ar * hr[i] - ai * hi[i]);
      const double new_ei = ei[i] - (ar * hi[i] + ai * hr[i]);
      const double tr = lr[i] * new_er - li[i] * new_ei, ti = lr[i] * new_ei + li[i] * new_er;
      next_er[i] = new_er;
      next_ei[i] = new_ei;
      next_hr[i] = hr[i] + (br * tr - bi * ti);
      next_hi[i] = hi[i] + (br * ti + bi * tr);
    }
  }
}

void GradedObjective::reflections(const std::vector<double>& y, Array& magnitude) const {
  std::vector<Numbers> e, h;
  for (std::size_t m = 0; m < waves_.size(); ++m) {
    const Group& group = groups()[m];
    recur(waves_[m], response(y, group, false), e, h);
    for (std::size_t i = 0; i < waves_[m].l.re.size(); ++i) {
      const Complex e0 = number(e[n_], i), before = e0 - number(h[n_], i), back = number(waves_[m].back, i);
      magnitude[group.first + static_cast<Eigen::Index>(i)] =
          std::sqrt(std::norm(e0 * back - before) / std::norm(before - e0 / back));
    }
  }
}

void GradedObjective::add_gradient(const std::vector<double>& y, const Array& share,
                                   std::vector<double>& gradient) const {
  const std::size_t places = 2 * n_;
  std::vector<Numbers> e, h;
  for (std::size_t m = 0; m < waves_.size(); ++m) {
    const Group& group = groups()[m];
    const Waves& waves = waves_[m];
    const std::size_t count = waves.l.re.size();
    const Response r = response(y, group, true);
    recur(waves, r, e, h);
    // R = B/A with B = E0 (P - 1) + H and A = E0 (1 - 1/P) - H; d ln R = (dB - R dA)/B.
    Numbers by_e, by_h;
    for (std::size_t i = 0; i < count; ++i) {
      const Complex back = number(waves.back, i), e0 = number(e[n_], i), h0 = number(h[n_], i);
      const Complex more = back - 1.0, less = 1.0 - 1.0 / back;
      const Complex b = e0 * more + h0, a = e0 * less - h0;
      const Complex weight = share[group.first + static_cast<Eigen::Index>(i)] / b;
      append(by_e, weight * (more - b / a * less));
      append(by_h, weight * (1.0 + b / a));
    }
    const auto collect = [&](std::size_t place, Complex slope) {
      gradient[place] += (slope * r.by_sigma[place]).real();
      gradient[places + place] += (slope * r.by_kappa[place]).real();
      gradient[2 * places + place] += (slope * r.by_alpha[place]).real();
    };
    const double *lr = waves.l.re.data(), *li = waves.l.im.data();
    double *ber = by_e.re.data(), *bei = by_e.im.data(), *bhr = by_h.re.data(), *bhi = by_h.im.data();
    for (std::size_t d = 0; d < n_; ++d) {
      const Numbers &e_after = e[n_ - d], &h_before = h[n_ - 1 - d];
      const double *er = e_after.re.data(), *ei = e_after.im.data();
      const double *hr = h_before.re.data(), *hi = h_before.im.data();
      const double sr = r.s[d].real(), si = r.s[d].imag();
      const double tr = r.s[n_ + d].real(), ti = r.s[n_ + d].imag();
      double node_re = 0.0, node_im = 0.0, half_re = 0.0, half_im = 0.0;
#pragma omp simd reduction(+ : node_re, node_im, half_re, half_im)
      for (std::size_t i = 0; i < count; ++i) {
        const double through_re = bhr[i] * lr[i] - bhi[i] * li[i];
        const double through_im = bhr[i] * li[i] + bhi[i] * lr[i];
        node_re += through_re * er[i] - through_im * ei[i];
        node_im += through_re * ei[i] + through_im * er[i];
        const double new_re = ber[i] + (sr * through_re - si * through_im);
        const double new_im = bei[i] + (sr * through_im + si * through_re);
        half_re += new_re * hr[i] - new_im * hi[i];
        half_im += new_re * hi[i] + new_im * hr[i];
        ber[i] = new_re;
        bei[i] = new_im;
        bhr[i] -= tr * new_re - ti * new_im;
        bhi[i] -= tr * new_im + ti * new_re;
      }
      collect(d, {node_re, node_im});
      collect(n_ + d, {-half_re, -half_im});
    }
  }
}

std::vector<double> GradedObjective::start(int number, const std::function<double()>& draw) const {
  // Polynomials of several strengths; the first three are fixed.
  struct Shape {
    double order, ratio, alpha, alpha_order, stretch;
  };
  constexpr Shape fixed[3]{{2.5, 3.0, 0.1, 1.0, 5.0}, {2.5, 1.2, 0.3, 2.0, 0.3}, {2.5, 6.0, 0.3, 4.0, 20.0}};
  Shape shape{1.5 + 2.5 * draw(), std::exp(-0.3 + 2.3 * draw()), std::exp(-4.0 + 4.0 * draw()),
              0.3 + 3.7 * draw(), std::exp(-2.0 + 5.0 * draw())};
  if (number < 3) shape = fixed[number];
  const std::size_t places = 2 * n_;
  std::vector<double> y(unknowns());
  for (std::size_t i = 0; i < places; ++i) {
    const bool half = i >= n_;
    const double depth =
        (static_cast<double>(half ? i - n_ : i) + (half ? 0.5 : 0.0)) / static_cast<double>(n_);
    const double least = 0.25 * std::pow(0.5 / static_cast<double>(n_), shape.order);
    const double profile = std::max(std::pow(depth, shape.order), least);
    y[i] = sigma_.inverse(0.8 * (shape.order + 1.0) * shape.ratio * profile);
    y[places + i] = kappa_less_1_.inverse(shape.stretch * (depth + (half ? 0.0 : 0.02)));
    y[2 * places + i] = alpha_.inverse(shape.alpha * std::pow(1.0 - depth, shape.alpha_order) + 1e-9);
  }
  return y;
}

LayerTable GradedObjective::table(const std::vector<double>& y, double spacing_m) const {
  LayerTable table;
  const std::size_t places = 2 * n_;
  const double unit = 1.0 / (eta0_ohm * spacing_m);
  const bool with_alpha = alpha_.hi > alpha_.lo;
  for (std::size_t i = 0; i < places; ++i) {
    const bool half = i >= n_;
    (half ? table.sigma_h_s_per_m : table.sigma_e_s_per_m).push_back(unit * sigma_.at(y[i]));
    (half ? table.kappa_h : table.kappa_e).push_back(1.0 + kappa_less_1_.at(y[places + i]));
    (half ? table.alpha_h_s_per_m : table.alpha_e_s_per_m)
        .push_back(with_alpha ? unit * alpha_.at(y[2 * places + i]) : 0.0);
  }
  return table;
}

}  // namespace wanewall
