#include "solver/shell/moebius.hpp"

#include <cmath>
#include <stdexcept>
#include <string>

#include "geometry/constants.hpp"

namespace wanewall {

MoebiusUpdate moebius_update(const MoebiusTable& table, double dt_s) {
  const std::size_t n = table.kappa.size();
  if (table.sigma_s_per_m.size() != n || table.alpha_s_per_m.size() != n)
    throw std::invalid_argument("kappa, sigma and alpha must have one entry per cell each");
  if (n > most_moebius_cells)
    throw std::invalid_argument("at most " + std::to_string(most_moebius_cells) + " cells are possible");
  MoebiusUpdate u;
  std::vector<double> s0;
  for (std::size_t j = 0; j < n; ++j) {
    const double kappa = table.kappa[j], sigma = table.sigma_s_per_m[j], alpha = table.alpha_s_per_m[j];
    if (!(kappa > 0.0) || !(sigma >= 0.0) || !(alpha >= 0.0) || !std::isfinite(kappa + sigma + alpha))
      throw std::invalid_argument("cell " + std::to_string(j) +
                                  " is active: kappa must be positive, sigma and alpha not negative");
    const double half_alpha = 0.5 * alpha * dt_s / eps0_f_per_m;
    const double g = 0.5 * sigma * dt_s / eps0_f_per_m / (1.0 + half_alpha);
    const double b = (1.0 - half_alpha) / (1.0 + half_alpha);
    s0.push_back(kappa + g);
    u.b.push_back(b);
    u.r.push_back(g * (1.0 + b));
    u.inv_s0.push_back(1.0 / s0[j]);
    u.b_inverse.push_back((kappa * b - g) / s0[j]);
    u.r_inverse.push_back((u.b_inverse[j] - b) / s0[j]);
  }
  u.lower.assign(n, 0.0);
  double pivot = 1.0;
  for (std::size_t j = 0; j < n; ++j) {
    const double inner = j > 0 ? s0[j - 1] : 1.0;
    const double diagonal = 0.25 * (inner + 1.0 / inner + s0[j] + 1.0 / s0[j]);
    const double beside = j > 0 ? 0.25 * (s0[j - 1] - 1.0 / s0[j - 1]) : 0.0;
    if (j > 0) u.lower[j] = beside / pivot;
    pivot = diagonal - u.lower[j] * beside;
    u.inv_diagonal.push_back(1.0 / pivot);
  }
  return u;
}

std::vector<std::vector<double>> MoebiusUpdate::dense() const {
  const auto n = static_cast<std::size_t>(cells());
  std::vector<std::vector<double>> inverse(n, std::vector<double>(n, 0.0));
  for (std::size_t column = 0; column < n; ++column) {
    std::vector<double> x(n, 0.0);
    x[column] = 1.0;
    for (std::size_t j = column + 1; j < n; ++j) x[j] = -lower[j] * x[j - 1];
    for (std::size_t j = n; j-- > 0;)
      x[j] = x[j] * inv_diagonal[j] - (j + 1 < n ? lower[j + 1] * x[j + 1] : 0.0);
    for (std::size_t j = 0; j < n; ++j) inverse[j][column] = x[j];
  }
  return inverse;
}

void check_moebius_faces(const Problem& problem) {
  for (Side side : all_sides) {
    const Face& face = problem.face(side);
    if (face.kind != FaceKind::moebius) continue;
    const std::string name(name_of(side));
    if (face.cells() < 1 || face.cells() != problem.lattice.shell(side))
      throw ProblemError("face " + name + ": a moebius layer has " + std::to_string(face.cells()) +
                         " cells and the lattice " + std::to_string(problem.lattice.shell(side)) +
                         " there / both must be the same number, 1 to " + std::to_string(most_moebius_cells));
    try {
      moebius_update(face.moebius, problem.lattice.dt_s);
    } catch (const std::invalid_argument& error) {
      throw ProblemError("face " + name + ": " + error.what() + " / correct the layer's table");
    }
    const MeshLines& lines = problem.lattice.along(axis_of(side));
    const int n = lines.cells(), cells = face.cells();
    const bool high = side == side_of(axis_of(side), true);
    for (int d = 0; d <= cells && d < n; ++d) {
      const int cell = high ? n - 1 - d : d;
      const double outer_m = lines.cell_m(high ? n - 1 : 0);
      if (std::abs(lines.cell_m(cell) - outer_m) > 1e-6 * outer_m)
        throw ProblemError("face " + name +
                           ": the mesh is not uniform in a moebius layer and the cell in front of it / give "
                           "these cells one size, or choose cfs_pml for this face");
    }
  }
}

ZWindow z_window(const Problem& problem, Side side, bool electric, const RowLayout& layout,
                 std::size_t bytes_per_value) {
  const Face& face = problem.face(side);
  const bool high = side == Side::z_hi;
  if (face.kind != FaceKind::moebius && face.kind != FaceKind::cfs_pml) return {};
  const int nz = problem.lattice.cells(Axis::z), cells = face.cells();
  const int lowest = electric ? 1 : 0;
  ZWindow window{high ? nz - cells : lowest, cells, 0, cells};
  // Padding goes towards the inside, where the row goes on.
  const int block = moebius_block_bytes / static_cast<int>(bytes_per_value);
  const int length = (cells + block - 1) / block * block;
  const bool fits = high ? nz - length >= 0 : lowest + length <= layout.row;
  if (!(electric && face.kind == FaceKind::moebius) && !fits) return window;
  window.length = length;
  if (high) {
    const int in_front = window.length - cells;
    window.begin -= in_front;
    window.first = in_front;
    window.last = window.length;
  }
  return window;
}

template <class Real>
MoebiusColumns<Real>::MoebiusColumns(const Problem& problem, Side side, const RowLayout& layout) {
  if (problem.face(side).kind != FaceKind::moebius) return;
  const MoebiusUpdate u = moebius_update(problem.face(side).moebius, problem.lattice.dt_s);
  const Axis axis = axis_of(side);
  const int n = problem.lattice.cells(axis);
  cells_ = u.cells();
  outwards_is_up_ = side == side_of(axis, true);
  nodes_ = outwards_is_up_ ? IndexRange{n - cells_, n} : IndexRange{1, cells_ + 1};
  const auto count = static_cast<std::size_t>(cells_);
  per_cell_ = AlignedArray<Real>(6 * (count + 1));
  std::fill_n(per_cell_.data(), per_cell_.size(), Real(0));
  const std::vector<double>* arrays[6]{&u.lower, &u.inv_diagonal, &u.b, &u.r, &u.b_inverse, &u.r_inverse};
  for (std::size_t a = 0; a < 6; ++a)
    for (std::size_t j = 0; j < count; ++j)
      per_cell_[a * (count + 1) + j] = static_cast<Real>((*arrays[a])[j]);
  if (axis != Axis::z) return;

  const ZWindow window = z_window(problem, side, true, layout, sizeof(Real));
  const auto length = static_cast<std::size_t>(window.length);
  const auto entry = [&](std::size_t j) {  // of node or cell j in the order of k
    return static_cast<std::size_t>(outwards_is_up_ ? window.first + static_cast<int>(j)
                                                    : window.last - 1 - static_cast<int>(j));
  };
  z_numbers_ = AlignedArray<Real>(4 * length);
  std::fill_n(z_numbers_.data(), z_numbers_.size(), Real(0));
  z_dense_ = AlignedArray<Real>(length * length);
  std::fill_n(z_dense_.data(), z_dense_.size(), Real(0));
  const auto dense = u.dense();
  for (std::size_t j = 0; j < count; ++j) {
    for (std::size_t a = 0; a < 4; ++a)
      z_numbers_[a * length + entry(j)] = static_cast<Real>((*arrays[a + 2])[j]);
    for (std::size_t source = 0; source < count; ++source)
      z_dense_[entry(source) * length + entry(j)] = static_cast<Real>(dense[j][source]);
  }
  z_task_.begin = window.begin;
  z_task_.n = window.length;
  z_task_.first = window.first;
  z_task_.last = window.last;
  z_task_.outwards_is_up = outwards_is_up_;
  z_task_.fits = window.begin >= 0 && window.begin + window.length <= layout.row;
  z_task_.dense = z_dense_.data();
  z_task_.numbers.b = z_numbers_.data();
  z_task_.numbers.r = z_numbers_.data() + length;
  z_task_.numbers.b_inverse = z_numbers_.data() + 2 * length;
  z_task_.numbers.r_inverse = z_numbers_.data() + 3 * length;
}

template <class Real>
MoebiusNumbers<Real> MoebiusColumns<Real>::numbers() const {
  const Real* p = per_cell_.data();
  const std::ptrdiff_t n = cells_ + 1;
  return {p, p + n, p + 2 * n, p + 3 * n, p + 4 * n, p + 5 * n};
}

template class MoebiusColumns<float>;
template class MoebiusColumns<double>;

}  // namespace wanewall
