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
  stretch.late.assign(static_cast<std::size_t>(padded_length), 0);
  stretch.slot.assign(static_cast<std::size_t>(padded_length), -1);
  for (int index = 0; index < count; ++index) inv[static_cast<std::size_t>(index)] = 1.0 / spacing(index);
  std::vector<char> in_layer(static_cast<std::size_t>(padded_length), 0);
  for (const bool high : {false, true}) {
    const Face& face = problem.face(side_of(axis, high));
    const bool moebius = face.kind == FaceKind::moebius && !electric;
    if (face.kind != FaceKind::cfs_pml && !moebius) continue;
    const LayerTable& layer = face.layer;
    const int cells = face.cells();
    const MoebiusUpdate update =
        moebius ? moebius_update(face.moebius, problem.lattice.dt_s) : MoebiusUpdate{};
    for (int d = 0; d < cells; ++d) {
      const int index =
          electric ? (high ? n - cells + d : cells - d) : (high ? n - cells + d : cells - 1 - d);
      const auto at = static_cast<std::size_t>(index), depth = static_cast<std::size_t>(d);
      in_layer[at] = 1;
      if (moebius) {
        inv[at] *= update.inv_s0[depth];
        stretch.b[at] = static_cast<Real>(update.b_inverse[depth]);
        stretch.c[at] = static_cast<Real>(update.r_inverse[depth] / spacing(index));
        stretch.late[at] = 1;
        continue;
      }
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
  for (std::size_t at = 0; at < in_layer.size(); ++at)
    if (in_layer[at]) stretch.slot[at] = stretch.n_slots++;
  stretch.inv = AlignedArray<Real>(inv.size());
  std::transform(inv.begin(), inv.end(), stretch.inv.data(), [](double v) { return static_cast<Real>(v); });
  return stretch;
}

LayerSizes layer_sizes(const Problem& problem, LayerPart part, const RowLayout& layout,
                       std::size_t bytes_per_value) {
  LayerSizes sizes;
  sizes.rows_per_slot = part == LayerPart::moebius_e ? 4 : 2;
  for (Side side : all_sides) {
    const Face& face = problem.face(side);
    const bool cfs = face.kind == FaceKind::cfs_pml && part != LayerPart::moebius_e;
    const bool moebius = face.kind == FaceKind::moebius && part != LayerPart::cfs_e;
    if (!cfs && !moebius) continue;
    if (axis_of(side) == Axis::z)
      sizes.z_values +=
          sizes.rows_per_slot * z_window(problem, side, part != LayerPart::h, layout, bytes_per_value).length;
    else
      (axis_of(side) == Axis::x ? sizes.x_slots : sizes.y_slots) += face.cells();
  }
  return sizes;
}

template <class Real>
LayerMemory<Real>::LayerMemory(const RowLayout& layout, const LayerSizes& sizes)
    : layout_(layout),
      y_slots_(sizes.y_slots),
      rows_per_slot_(sizes.rows_per_slot),
      z_values_(sizes.z_values),
      x_(static_cast<std::size_t>(sizes.x_slots * x_stride())),
      y_(static_cast<std::size_t>((layout.nx + 1L) * sizes.y_slots * y_stride())),
      z_(static_cast<std::size_t>((layout.nx + 1L) * (layout.ny + 1L) * sizes.z_values)) {}

template <class Real>
void LayerMemory<Real>::zero_planes(int i_begin, int i_end, const std::vector<int>& x_slot) {
  for (int i = i_begin; i < i_end; ++i) {
    const int slot = x_slot[static_cast<std::size_t>(i)];
    if (slot >= 0) std::fill_n(x(slot, 0, 0), x_stride(), Real(0));
    if (y_slots_ > 0) std::fill_n(y(0, i, 0), y_slots_ * y_stride(), Real(0));
    if (z_values_ > 0) std::fill_n(z(i, 0), (layout_.ny + 1L) * z_values_, Real(0));
  }
}

template <class Real>
std::size_t LayerMemory<Real>::bytes(const RowLayout& layout, const LayerSizes& sizes) {
  const double rows = sizes.rows_per_slot *
                      (sizes.x_slots * (layout.ny + 1.0) + sizes.y_slots * (layout.nx + 1.0)) *
                      static_cast<double>(layout.row);
  const double ends = (layout.nx + 1.0) * (layout.ny + 1.0) * sizes.z_values;
  return static_cast<std::size_t>((rows + ends) * sizeof(Real));
}

template Stretch<float> make_stretch<float>(const Problem&, Axis, bool, int);
template Stretch<double> make_stretch<double>(const Problem&, Axis, bool, int);
template class LayerMemory<float>;
template class LayerMemory<double>;

}  // namespace wanewall
