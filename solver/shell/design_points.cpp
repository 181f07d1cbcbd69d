#include "solver/shell/design_points.hpp"

#include <algorithm>
#include <cmath>
#include <complex>

#include "geometry/constants.hpp"

namespace wanewall {
namespace {

constexpr double arc_by_wavelength = 2.0, arc_by_size = 1.5;
constexpr double thickest_clearance = 3.0;
constexpr int imaginary_points = 16, arc_points = 8, real_points = 14;

void add(DesignPoints& points, std::complex<double> q, double weight) {
  points.q_re.push_back(q.real());
  points.q_im.push_back(q.imag());
  points.weight.push_back(weight);
}

double between(double lo, double hi, int n, int of) {
  return lo * std::pow(hi / lo, static_cast<double>(n) / (of - 1));
}

/// Wavenumber on the lattice of a wave along the normal; held below the lattice's end.
double lattice_k(double k0, double courant, double index) {
  const double omega = 2.0 / courant * std::sin(0.5 * k0 * courant);
  return 2.0 * std::asin(std::min(0.999, 0.5 * index * omega));
}

}  // namespace

double design_clearance(double clearance_cells) {
  return std::min(0.5 * (clearance_cells + 1.0), thickest_clearance);
}

DesignInputs as_designed(DesignInputs inputs) {
  inputs.clearance_cells = 2.0 * design_clearance(inputs.clearance_cells) - 1.0;
  return inputs;
}

std::vector<DesignPoints> near_field_points(const DesignInputs& inputs) {
  const double h = design_clearance(inputs.clearance_cells), size = inputs.diagonal_cells;
  std::vector<DesignPoints> all;
  for (const DesignFrequency& at : inputs.frequencies) {
    DesignPoints points;
    points.k0 = 2.0 * pi / at.wavelength_cells;
    points.courant = inputs.courant;
    const double delta = std::sqrt(arc_by_wavelength * arc_by_wavelength * points.k0 / size +
                                   arc_by_size * arc_by_size / (size * size));
    const double k = lattice_k(points.k0, inputs.courant, at.index);
    const double reach = k / delta;
    if (reach > 1.05) {
      for (int n = 0; n < imaginary_points; ++n)
        add(points, {0.0, std::tan(0.5 * between(delta, k, n, imaginary_points))}, 1.0);
    } else if (reach > 0.3) {
      add(points, {0.0, std::tan(0.5 * k)}, reach * reach * reach);
    }
    const double on_arc = std::min(1.0, reach * reach);
    for (int n = 0; n < arc_points; ++n)
      add(points, std::polar(std::tan(0.5 * delta), 0.5 * pi * (n + 0.5) / arc_points), on_arc);
    const double end = std::max(3.0 / h, 2.0 * delta);
    for (int n = 0; n < real_points; ++n) {
      const double gamma = between(delta, end, n, real_points);
      add(points, {std::tanh(0.5 * gamma), 0.0}, std::exp(-2.0 * gamma * h));
    }
    all.push_back(std::move(points));
  }
  return all;
}

std::vector<DesignPoints> plane_wave_points(double courant, double shortest_cells, double longest_cells,
                                            double largest_angle_rad) {
  constexpr int wavelengths = 8, angles = 28;
  const double least = std::cos(largest_angle_rad);
  std::vector<DesignPoints> all;
  for (int w = 0; w < wavelengths; ++w) {
    DesignPoints points;
    points.k0 = 2.0 * pi / between(shortest_cells, longest_cells, w, wavelengths);
    points.courant = courant;
    const double omega = 2.0 / courant * std::sin(0.5 * points.k0 * courant);
    for (int n = 0; n < angles; ++n) {
      // Even in the logarithm of the cosine, denser towards both ends, where the extremes lie.
      const double u = 0.5 * (1.0 - std::cos(pi * n / (angles - 1)));
      const double cosine = std::pow(least, u);
      add(points, {0.0, std::tan(std::asin(0.5 * omega * cosine))}, 1.0);
    }
    all.push_back(std::move(points));
  }
  return all;
}

}  // namespace wanewall
