#include "postproc/wave_basis.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <complex>
#include <stdexcept>

#include "geometry/constants.hpp"
#include "postproc/audit_planes.hpp"

namespace wanewall {
namespace {

using Complex = std::complex<double>;

constexpr double least_period_wavelengths = 40.0;
constexpr double least_padding_wavelengths = 16.0;
constexpr double ramp_share = 0.1;  // of the clear width, at each end

bool is_periodic(const Lattice& lattice, Axis a) {
  return lattice.periodic[static_cast<std::size_t>(index_of(a))];
}

// The grid of plane waves along one axis: k = 2 pi p / (n_period d), p = first...
struct WaveGrid {
  double spacing_m = 0.0;
  long n_period = 1;  // cells
  long p_first = 0;
  long n_waves = 1;
  double k_rad_per_m(long i) const {
    return 2.0 * pi * static_cast<double>(p_first + i) / (static_cast<double>(n_period) * spacing_m);
  }
  double lattice_k_per_m(long i) const {
    return 2.0 / spacing_m * std::sin(0.5 * spacing_m * k_rad_per_m(i));
  }
  double period_m() const { return static_cast<double>(n_period) * spacing_m; }
};

WaveGrid wave_grid(double spacing_m, long n_period, double w_per_m) {
  WaveGrid grid{spacing_m, n_period, 0, 1};
  const double half_k_d = std::asin(std::min(1.0, 0.5 * spacing_m * w_per_m));
  const long p_last =
      static_cast<long>(std::floor(half_k_d * static_cast<double>(n_period) / pi * (1.0 + 1e-12)));
  const bool whole_even_band =
      2 * p_last >= n_period && n_period % 2 == 0;  // +-n/2 are one and the same wave
  grid.p_first = whole_even_band ? 1 - n_period / 2 : -std::min(p_last, (n_period - 1) / 2);
  grid.n_waves = whole_even_band ? n_period : 1 - 2 * grid.p_first;
  return grid;
}

double clear_width_m(const Lattice& lattice, Axis a) {
  const IndexRange clear = lattice.clear_cells(a);
  return lattice.along(a).node_m(clear.end) - lattice.along(a).node_m(clear.begin);
}

WaveGrid grid_along(const Lattice& lattice, Axis a, double w_per_m) {
  const double spacing_m = lattice.along(a).cell_m(0);
  if (is_periodic(lattice, a)) return wave_grid(spacing_m, lattice.cells(a), w_per_m);
  const double wavelength_m = 2.0 * pi / w_per_m;
  const double period_m = std::max(least_period_wavelengths * wavelength_m,
                                   clear_width_m(lattice, a) + least_padding_wavelengths * wavelength_m);
  return wave_grid(spacing_m, static_cast<long>(std::min(std::ceil(period_m / spacing_m), 1e9)), w_per_m);
}

// Distances from the low end of the clear part at a component's positions.
Eigen::ArrayXd positions_m(const Lattice& lattice, Component c, Axis a, IndexRange indices) {
  const double origin_m = lattice.along(a).node_m(lattice.clear_cells(a).begin);
  Eigen::ArrayXd x(indices.size());
  for (int i = 0; i < indices.size(); ++i) x[i] = lattice.position_m(c, a, indices.begin + i) - origin_m;
  return x;
}

double sin2(double x) {
  return std::sin(x) * std::sin(x);
}

Eigen::ArrayXd flat_taper(const Eigen::ArrayXd& x_m, double width_m) {
  const double ramp_m = ramp_share * width_m;
  return x_m.unaryExpr([=](double x) {
    const double from_end_m = std::max(0.0, std::min(x, width_m - x));
    return from_end_m < ramp_m ? sin2(0.5 * pi * from_end_m / ramp_m) : 1.0;
  });
}

// Over the whole width; mean square 1 over the cells.
Eigen::ArrayXd plain_hann_taper(const Eigen::ArrayXd& x_m, double width_m, int cells) {
  const Eigen::ArrayXd w =
      x_m.unaryExpr([=](double x) { return x > 0.0 && x < width_m ? sin2(pi * x / width_m) : 0.0; });
  return w / std::sqrt(w.square().sum() / cells);
}

// Over the flat part of the other; mean square 1 over the clear cells.
Eigen::ArrayXd hann_taper(const Eigen::ArrayXd& x_m, double width_m, int cells) {
  const double ramp_m = ramp_share * width_m;
  const Eigen::ArrayXd w = x_m.unaryExpr([=](double x) {
    const double from_ramp_m = std::min(x, width_m - x) - ramp_m;
    return from_ramp_m > 0.0 ? sin2(pi * from_ramp_m / (width_m - 2.0 * ramp_m)) : 0.0;
  });
  return w / std::sqrt(w.square().sum() / cells);
}

// [wave][position] of weight exp(+j k x): the analysis of samples into plane waves.
Eigen::MatrixXcd analysis(const WaveGrid& grid, const Eigen::ArrayXd& x_m, const Eigen::ArrayXd& weight) {
  Eigen::MatrixXcd matrix(grid.n_waves, x_m.size());
  for (Eigen::Index i = 0; i < x_m.size(); ++i)
    for (long p = 0; p < grid.n_waves; ++p)
      matrix(p, i) = std::polar(weight[i], grid.k_rad_per_m(p) * x_m[i]);
  return matrix;
}

// At the ends of a wide clear part the outgoing wave itself is near grazing, and what the ramps make of it
// varies slowly along the normal. Found on exact lattice fields 2 to 30 wavelengths wide
// (tests/postproc/test_floor.cpp).
double least_cosine(const WaveBasis& basis, double w_per_m) {
  const double widest_wavelengths =
      std::max(basis.tapered_width_m[0], basis.tapered_width_m[1]) * w_per_m / (2.0 * pi);
  return std::min(0.2, 3.0 / widest_wavelengths);
}

AxisBasis axis_basis(const Lattice& lattice, Component c, Axis a, const WaveGrid& grid) {
  AxisBasis basis;
  basis.eigenvalue_per_m2.resize(grid.n_waves);
  for (long p = 0; p < grid.n_waves; ++p)
    basis.eigenvalue_per_m2[p] = -grid.lattice_k_per_m(p) * grid.lattice_k_per_m(p);
  const double d_m = grid.spacing_m;
  if (is_periodic(lattice, a)) {
    basis.indices = {0, lattice.cells(a)};  // the last node is an image of the first
    const Eigen::ArrayXd x_m = positions_m(lattice, c, a, basis.indices);
    basis.expand = analysis(grid, x_m, Eigen::ArrayXd::Constant(x_m.size(), d_m));
    return basis;
  }
  basis.indices = lattice.clear(c, a);
  const Eigen::ArrayXd x_m = positions_m(lattice, c, a, basis.indices);
  const double width_m = clear_width_m(lattice, a);
  basis.expand = analysis(grid, x_m, d_m * flat_taper(x_m, width_m));
  const Eigen::ArrayXd reading = d_m * hann_taper(x_m, width_m, lattice.clear_cells(a).size());
  const Eigen::MatrixXcd synthesis =
      analysis(grid, x_m, Eigen::ArrayXd::Constant(x_m.size(), 1.0 / grid.period_m())).adjoint();
  basis.to_plane_waves = analysis(grid, x_m, reading) * synthesis;
  return basis;
}

// The modes of one axis, and their plane waves under a Hann taper over the cells `window`, or over the
// period.
AxisBasis modal_axis_basis(const Lattice& lattice, Component c, Axis a, const AxisModes& modes,
                           const WaveGrid& grid, IndexRange window) {
  AxisBasis basis;
  basis.indices = modes.indices;
  basis.expand = modes.expand;
  basis.eigenvalue_per_m2 = modes.eigenvalue_per_m2;
  basis.modes = modes.modes;
  const MeshLines& lines = lattice.along(a);
  const double origin_m = lines.node_m(window.begin), width_m = lines.node_m(window.end) - origin_m;
  Eigen::ArrayXd x_m(modes.indices.size());
  for (int i = 0; i < modes.indices.size(); ++i)
    x_m[i] = lattice.position_m(c, a, modes.indices.begin + i) - origin_m;
  const Eigen::ArrayXd weight =
      is_periodic(lattice, a)
          ? Eigen::ArrayXd::Constant(x_m.size(), grid.spacing_m)
          : Eigen::ArrayXd(grid.spacing_m * plain_hann_taper(x_m, width_m, window.size()));
  basis.to_plane_waves = analysis(grid, x_m, weight) * modes.modes;
  return basis;
}

bool cells_are_even(const Lattice& lattice, Axis a, IndexRange cells) {
  const MeshLines& lines = lattice.along(a);
  for (int i = cells.begin; i < cells.end; ++i)
    if (std::abs(lines.cell_m(i) - lines.cell_m(cells.begin)) > 1e-9 * lines.cell_m(cells.begin))
      return false;
  return true;
}

}  // namespace

std::string modes_unfit_because(const Lattice& lattice, const std::array<Face, 6>& shell,
                                const AuditFace& face) {
  if (!face.is_uniform && !face.is_layered)
    return face.clear_is_uniform ? "an object crosses the side shells at the face's plane"
                                 : "an object crosses the face's plane";
  for (Axis a : axes_of(face.side).tangential)
    if (const std::string unfit = no_modes_because(lattice, shell, a); !unfit.empty()) return unfit;
  return {};
}

IndexRange reading_cells(const Lattice& lattice, const AuditFace& face, Axis axis) {
  const IndexRange clear = lattice.clear_cells(axis);
  if (face.is_uniform || axis != Axis::z) return clear;
  const LayeredProfile& p = face.profile;
  // A cell belongs to a run when its half node and both its nodes have the medium of the run's first cell.
  const auto same = [&](int at, int from) {
    const auto i = static_cast<std::size_t>(at), j = static_cast<std::size_t>(from);
    const auto node_is = [&](std::size_t node) {
      return p.permittivity_rel_node[node] == p.permittivity_rel_half[j] &&
             p.conductivity_s_per_m_node[node] == p.conductivity_s_per_m_half[j] &&
             p.permeability_rel_node[node] == p.permeability_rel_half[j] &&
             p.magnetic_conductivity_ohm_per_m_node[node] == p.magnetic_conductivity_ohm_per_m_half[j];
    };
    return p.permittivity_rel_half[i] == p.permittivity_rel_half[j] &&
           p.conductivity_s_per_m_half[i] == p.conductivity_s_per_m_half[j] &&
           p.permeability_rel_half[i] == p.permeability_rel_half[j] &&
           p.magnetic_conductivity_ohm_per_m_half[i] == p.magnetic_conductivity_ohm_per_m_half[j] &&
           node_is(i) && node_is(i + 1);
  };
  IndexRange best{clear.begin, clear.begin};
  for (int begin = clear.begin; begin < clear.end;) {
    int end = begin;
    while (end < clear.end && same(end, begin)) ++end;
    if (end - begin > best.size()) best = {begin, end};
    begin = std::max(end, begin + 1);
  }
  return best;
}

WaveBasis modal_basis(const Lattice& lattice, const AuditFace& face, const CrossSectionModes& modes,
                      const FaceMedium& medium, IndexRange window) {
  const std::array<Axis, 2> axes = axes_of(face.side).tangential;
  WaveBasis basis;
  basis.per_area_per_m2 = 1.0;
  const bool layered = !face.is_uniform;
  if (layered) {
    basis.fields = SplitFields::hz_and_ez;
    basis.eigenvalues_hold_w2 = true;
  }
  for (std::size_t i : {0u, 1u}) {
    const Axis a = axes[i];
    const IndexRange cells = layered && a == Axis::z ? window : lattice.clear_cells(a);
    const double w_per_m = medium.w_per_m(), spacing_m = lattice.along(a).cell_m(cells.begin);
    WaveGrid grid = grid_along(lattice, a, w_per_m);
    const bool readable = cells_are_even(lattice, a, cells) &&
                          (is_periodic(lattice, a) || cells.size() >= fewest_tapered_cells);
    grid.spacing_m = spacing_m;
    if (!readable) grid.n_waves = 0;  // totals only
    for (std::size_t c : {0u, 1u}) {
      const Component component = layered ? (c == 0 ? Component::hz : Component::ez) : electric(axes[c]);
      const auto at = static_cast<std::size_t>(index_of(a));
      const std::optional<AxisModes>& found = layered && a == Axis::z
                                                  ? (c == 0 ? modes.layered_hz : modes.layered_ez)
                                              : is_half(component, a) ? modes.halves[at]
                                                                      : modes.nodes[at];
      basis.parts[c][i] = modal_axis_basis(lattice, component, a, found.value(), grid, cells);
    }
    basis.plane_wave_per_m[i].resize(grid.n_waves);
    for (long p = 0; p < grid.n_waves; ++p) basis.plane_wave_per_m[i][p] = grid.lattice_k_per_m(p);
    basis.per_area_per_m2 /= grid.period_m();
    if (!is_periodic(lattice, a))
      basis.tapered_width_m[i] = lattice.along(a).node_m(cells.end) - lattice.along(a).node_m(cells.begin);
  }
  return basis;
}

BasisKind tapered_plane_wave_kind(const Lattice& lattice, Side side) {
  const std::array<Axis, 2> axes = axes_of(side).tangential;
  const bool first = is_periodic(lattice, axes[0]), second = is_periodic(lattice, axes[1]);
  if (first && second) return {"plane waves over one period", true};
  if (!first && !second) return {"tapered plane waves over the clear part", false};
  return {fmt::format("plane waves, over one period along {}, tapered over the clear part along {}",
                      name_of(axes[first ? 0 : 1]), name_of(axes[first ? 1 : 0])),
          false};
}

std::string plane_waves_unfit_because(const Lattice& lattice, Side side) {
  for (Axis a : axes_of(side).tangential) {
    if (!lattice.along(a).is_uniform())
      return fmt::format("the mesh lines along {} are not evenly spaced", name_of(a));
    const int cells = lattice.clear_cells(a).size();
    if (!is_periodic(lattice, a) && cells < fewest_tapered_cells)
      return fmt::format("only {} clear cells along {}; the taper needs {}", cells, name_of(a),
                         fewest_tapered_cells);
  }
  return {};
}

WaveBasis tapered_plane_waves(const Lattice& lattice, Side side, const FaceMedium& medium) {
  const std::string unfit = plane_waves_unfit_because(lattice, side);
  if (!unfit.empty()) throw std::invalid_argument("no plane waves on this face: " + unfit);
  const std::array<Axis, 2> axes = axes_of(side).tangential;
  const double w_per_m = medium.w_per_m();

  WaveBasis basis;
  basis.per_area_per_m2 = 1.0;
  for (std::size_t i : {0u, 1u}) {
    const WaveGrid grid = grid_along(lattice, axes[i], w_per_m);
    for (std::size_t c : {0u, 1u}) basis.parts[c][i] = axis_basis(lattice, electric(axes[c]), axes[i], grid);
    basis.plane_wave_per_m[i].resize(grid.n_waves);
    for (long p = 0; p < grid.n_waves; ++p) basis.plane_wave_per_m[i][p] = grid.lattice_k_per_m(p);
    basis.per_area_per_m2 /= grid.period_m();
    if (!is_periodic(lattice, axes[i])) basis.tapered_width_m[i] = clear_width_m(lattice, axes[i]);
  }
  basis.least_cosine = basis.is_exact() ? 0.0 : least_cosine(basis, w_per_m);
  return basis;
}

}  // namespace wanewall
