#include "solver/shell/stretch.hpp"

#include <algorithm>
#include <cmath>

#include "geometry/constants.hpp"

namespace wanewall {

Recursion layer_recursion(double sigma_s_per_m, double kappa, double alpha_s_per_m, double spacing_m,
                          double dt_s) {
  const double b = std::exp(-(sigma_s_per_m / kappa + alpha_s_per_m) * dt_s / eps0_f_per_m);
  const double denominator = sigma_s_per_m * kappa + kappa * kappa * alpha_s_per_m;
  const double c = denominator > 0.0 ? sigma_s_per_m * (b - 1.0) / denominator : 0.0;
  return {b, c / spacing_m};
}

template <class Real>
Stretch<Real> make_stretch(const Problem& problem, Axis axis, bool electric, int padded_length) {
  const MeshLines& lines = problem.lattice.along(axis);
  const int n = lines.cells();
  const bool periodic = problem.lattice.periodic[static_cast<std::size_t>(index_of(axis))];
  const int count = electric ? n + 1 : n;
  const auto spacing = [&](int index) {
    if (!electric) return lines.cell_m(index);
    if (periodic && (index == 0 || index == n)) return 0.5 * (lines.cell_m(0) + lines.cell_m(n - 1));
    return lines.dual_m(index);
  };
  std::vector<double> inv(static_cast<std::size_t>(padded_length), 0.0);
  Stretch<Real> stretch;
  stretch.b.assign(static_cast<std::size_t>(padded_length), Real(0));
  stretch.c.assign(static_cast<std::size_t>(padded_length), Real(0));
  stretch.slot.assign(static_cast<std::size_t>(padded_length), -1);
  for (int index = 0; index < count; ++index) inv[static_cast<std::size_t>(index)] = 1.0 / spacing(index);
  for (const bool high : {false, true}) {
    const Face& face = problem.face(side_of(axis, high));
    if (face.kind != FaceKind::cfs_pml) continue;
    const LayerTable& layer = face.layer;
    const int cells = layer.cells();
    for (int d = 0; d < cells; ++d) {
      const int index =
          electric ? (high ? n - cells + d : cells - d) : (high ? n - cells + d : cells - 1 - d);
      const auto at = static_cast<std::size_t>(index), depth = static_cast<std::size_t>(d);
      const double sigma = (electric ? layer.sigma_e_s_per_m : layer.sigma_h_s_per_m)[depth];
      const double kappa = (electric ? layer.kappa_e : layer.kappa_h)[depth];
      const double alpha = (electric ? layer.alpha_e_s_per_m : layer.alpha_h_s_per_m)[depth];
      const Recursion r = layer_recursion(sigma, kappa, alpha, spacing(index), problem.lattice.dt_s);
      inv[at] /= kappa;
      stretch.b[at] = static_cast<Real>(r.b);
      stretch.c[at] = static_cast<Real>(r.c_per_m);
    }
  }
  // Slots in index order, so that neighbours in the lattice are neighbours in memory.
  for (int index = 0; index < count; ++index) {
    const int lo = problem.face(side_of(axis, false)).kind == FaceKind::cfs_pml
                       ? problem.face(side_of(axis, false)).layer.cells()
                       : 0;
    const int hi = problem.face(side_of(axis, true)).kind == FaceKind::cfs_pml
                       ? problem.face(side_of(axis, true)).layer.cells()
                       : 0;
    const bool in_lo = electric ? (index >= 1 && index <= lo) : index < lo;
    const bool in_hi = index >= n - hi && index < n;
    if (in_lo || in_hi) stretch.slot[static_cast<std::size_t>(index)] = stretch.n_slots++;
  }
  stretch.inv = AlignedArray<Real>(inv.size());
  std::transform(inv.begin(), inv.end(), stretch.inv.data(), [](double v) { return static_cast<Real>(v); });
  return stretch;
}

template <class Real>
LayerMemory<Real>::LayerMemory(const RowLayout& layout, int x_slots, int y_slots, int z_layer_cells)
    : layout_(layout),
      y_slots_(y_slots),
      z_cells_(z_layer_cells),
      x_(static_cast<std::size_t>(x_slots * (layout.ny + 1L) * 2 * layout.row)),
      y_(static_cast<std::size_t>((layout.nx + 1L) * y_slots * 2 * layout.row)),
      z_(static_cast<std::size_t>((layout.nx + 1L) * (layout.ny + 1L) * 2 * z_layer_cells)) {}

template <class Real>
void LayerMemory<Real>::zero_planes(int i_begin, int i_end, const std::vector<int>& x_slot) {
  for (int i = i_begin; i < i_end; ++i) {
    const int slot = x_slot[static_cast<std::size_t>(i)];
    if (slot >= 0) std::fill_n(x(slot, 0, 0), (layout_.ny + 1L) * 2 * layout_.row, Real(0));
    if (y_slots_ > 0) std::fill_n(y(0, i, 0), long{y_slots_} * 2 * layout_.row, Real(0));
    if (z_cells_ > 0) std::fill_n(z(i, 0), (layout_.ny + 1L) * 2 * z_cells_, Real(0));
  }
}

template <class Real>
std::size_t LayerMemory<Real>::bytes(const RowLayout& layout, int x_slots, int y_slots, int z_layer_cells) {
  const double rows =
      2.0 * (x_slots * (layout.ny + 1.0) + y_slots * (layout.nx + 1.0)) * static_cast<double>(layout.row);
  const double ends = 2.0 * (layout.nx + 1.0) * (layout.ny + 1.0) * z_layer_cells;
  return static_cast<std::size_t>((rows + ends) * sizeof(Real));
}

template Stretch<float> make_stretch<float>(const Problem&, Axis, bool, int);
template Stretch<double> make_stretch<double>(const Problem&, Axis, bool, int);
template class LayerMemory<float>;
template class LayerMemory<double>;

}  // namespace wanewall
