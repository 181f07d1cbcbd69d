#include "solver/field_survey.hpp"

#include <algorithm>
#include <cmath>

#include "geometry/constants.hpp"

namespace wanewall {

template <class Real>
double clear_energy_j(const Lattice& lattice, const Fields<Real>& fields, const MediaRows<Real>& e_media,
                      const MediaRows<Real>& h_media, int threads) {
  const RowLayout& layout = fields.layout();
  const double c_dt = c0_m_per_s * lattice.dt_s;
  // Weight of an index along an axis: the length that belongs to it, halved on the rim of the clear volume.
  const auto weights = [&](Component c, Axis a) {
    std::vector<double> w(static_cast<std::size_t>(lattice.cells(a)) + 1, 0.0);
    const IndexRange clear = lattice.clear(c, a);
    for (int n = clear.begin; n < clear.end; ++n) {
      const bool rim = !is_half(c, a) && (n == clear.begin || n + 1 == clear.end);
      w[static_cast<std::size_t>(n)] =
          is_half(c, a) ? lattice.along(a).cell_m(n) : lattice.along(a).dual_m(n) * (rim ? 0.5 : 1.0);
    }
    return w;
  };
  double total = 0.0;
  for (Component c : all_components) {
    const std::vector<double> wx = weights(c, Axis::x), wy = weights(c, Axis::y), wz = weights(c, Axis::z);
    const IndexRange x = lattice.clear(c, Axis::x), y = lattice.clear(c, Axis::y),
                     z = lattice.clear(c, Axis::z);
    const int component = index_of(axis_of(c));
    std::vector<double> of_plane(static_cast<std::size_t>(layout.nx) + 1, 0.0);
#pragma omp parallel for num_threads(threads) schedule(static)
    for (int i = x.begin; i < x.end; ++i) {
      double plane = 0.0;
      for (int j = y.begin; j < y.end; ++j) {
        const Real* row = fields.row(c, i, j);
        double sum = 0.0;
        for (const MediaSpan<Real>& span : (is_electric(c) ? e_media : h_media).row(i, j).spans) {
          const int length = span.end - span.begin;
          const int from = std::max(span.begin, z.begin), to = std::min(span.end, z.end);
          // eps_r (or mu_r) from the update itself.
          const auto relative = [&](double decay, double gain) {
            return gain == 0.0 ? 0.0 : 0.5 * c_dt * (1.0 + decay) / gain;
          };
          double part = 0.0;
          if (!span.mixed) {
            const double* w = wz.data();
#pragma omp simd reduction(+ : part)
            for (int k = from; k < to; ++k)
              part += static_cast<double>(row[k]) * static_cast<double>(row[k]) * w[k];
            part *= relative(static_cast<double>(span.decay[component]),
                             static_cast<double>(span.gain[component]));
          } else {
            for (int k = from; k < to; ++k) {
              const Real* pair = span.mixed + 2 * component * length + (k - span.begin);
              const double value = static_cast<double>(row[k]);
              part += relative(static_cast<double>(pair[0]), static_cast<double>(pair[length])) * value *
                      value * wz[static_cast<std::size_t>(k)];
            }
          }
          sum += part;
        }
        plane += sum * wy[static_cast<std::size_t>(j)];
      }
      of_plane[static_cast<std::size_t>(i)] = plane * wx[static_cast<std::size_t>(i)];
    }
    for (double plane : of_plane) total += plane;  // in order, whatever the threads
  }
  return 0.5 * eps0_f_per_m * total;
}

template <class Real>
std::string find_not_finite(const Fields<Real>& fields) {
  const RowLayout& layout = fields.layout();
  for (Component c : all_components)
    for (int i = 0; i <= layout.nx; ++i)
      for (int j = 0; j <= layout.ny; ++j)
        for (int k = 0; k <= layout.nz; ++k)
          if (!std::isfinite(fields.row(c, i, j)[k]))
            return std::string(name_of(c)) + " in cell (" + std::to_string(i) + ", " + std::to_string(j) +
                   ", " + std::to_string(k) + ")";
  return {};
}

template double clear_energy_j(const Lattice&, const Fields<float>&, const MediaRows<float>&,
                               const MediaRows<float>&, int);
template std::string find_not_finite(const Fields<float>&);
template double clear_energy_j(const Lattice&, const Fields<double>&, const MediaRows<double>&,
                               const MediaRows<double>&, int);
template std::string find_not_finite(const Fields<double>&);

}  // namespace wanewall
