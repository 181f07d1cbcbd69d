#include "solver/shell/column_run.hpp"

#include <algorithm>
#include <cmath>
#include <stdexcept>

#include "geometry/constants.hpp"
#include "solver/marcher.hpp"

namespace wanewall {
namespace {

using Complex = std::complex<double>;

// Widths of the pulse between its start and its peak, and between the carrier and the mode's cut-off: what is
// left there is below rounding, so nothing creeps along the guide when the record ends.
constexpr double start_in_widths = 7.5;
constexpr double width_above_cutoff = 7.5;
constexpr int gap = 6;  ///< cells from the reading to the face

class Guide {
 public:
  explicit Guide(const ColumnRequest& request)
      : request_(request),
        across_m_(request.across_m > 0.0 ? request.across_m : request.cell_m),
        dt_s_(request.dt_s > 0.0 ? request.dt_s : 0.99 * request.cell_m / (c0_m_per_s * std::sqrt(3.0))) {
    const double wavelengths = request.cells_per_wavelength;
    if (request.angle_rad > 0.0)
      width_ = std::max(4, static_cast<int>(std::lround(0.5 * wavelengths * request.cell_m /
                                                        (std::sin(request.angle_rad) * across_m_))));
    const double index = std::sqrt(request.medium.permittivity_rel * request.medium.permeability_rel);
    const auto omega_at = [&](double k_per_m) {
      return 2.0 / dt_s_ * std::asin(std::min(1.0, 0.5 * c0_m_per_s * dt_s_ / index * k_per_m));
    };
    if (request.angle_rad > 0.0) {
      kt_per_m_ = 2.0 / across_m_ * std::sin(0.5 * pi / width_);
      cutoff_ = omega_at(kt_per_m_);
      omega_ = omega_at(kt_per_m_ / std::sin(request.angle_rad));
    } else {
      omega_ = omega_at(2.0 / request.cell_m * std::sin(pi / wavelengths));
    }
  }

  bool te() const { return request_.polarisation == Polarisation::te; }
  double omega() const { return omega_; }
  double cutoff() const { return cutoff_; }
  double kt_per_m() const { return kt_per_m_; }
  double dt_s() const { return dt_s_; }

  /// `length` cells, with the face behind them when it has any kind but an electric wall.
  Problem problem(int length, const Face& face) const {
    const int cells = has_layer(face.kind) ? face.cells() : 0;
    Problem p;
    p.precision = Precision::double_precision;
    p.media.push_back(request_.medium);
    p.threads = 1;
    Index3 n{1, 1, 1};
    n[at(request_.along)] = length + cells;
    n[at(request_.across)] = width_;
    for (std::size_t a = 0; a < 3; ++a) p.lattice.lines[a] = MeshLines::uniform(0.0, request_.cell_m, n[a]);
    const Side side = side_of(request_.along, request_.high);
    p.faces[static_cast<std::size_t>(index_of(side))] = face;
    p.lattice.shell_cells[static_cast<std::size_t>(index_of(side))] = cells;
    set_periodic(p, third());
    if (width_ == 1) set_periodic(p, request_.across);
    p.lattice.dt_s = dt_s_;
    return p;
  }

  /// A sheet of dipoles in the shape of the mode. Nodes count from the far end towards the face.
  void add_source(Problem& p, int node) const {
    Dipole dipole;
    dipole.is_magnetic = !te();
    dipole.pulse.centre_hz = omega_ / (2.0 * pi);
    dipole.pulse.width_s = width_above_cutoff / (omega_ - cutoff_);
    dipole.pulse.delay_s = start_in_widths * dipole.pulse.width_s;
    for (int i = 0; i < width_; ++i) {
      const double place = te() ? i : i + 0.5;
      double shape = 1.0;
      if (width_ > 1) shape = te() ? std::sin(pi * place / width_) : std::cos(pi * place / width_);
      if (shape == 0.0) continue;
      dipole.position_m[at(request_.along)] = position_m(p, te() ? node : node + 0.5);
      dipole.position_m[at(request_.across)] = place * across_m_;
      dipole.position_m[at(third())] = te() ? 0.5 * request_.cell_m : 0.0;
      dipole.moment[at(third())] = shape;
      p.dipoles.push_back(dipole);
    }
  }
  double pulse_s() const { return 2.0 * start_in_widths * width_above_cutoff / (omega_ - cutoff_); }

  /// Running Fourier sum of E (te) or H (tm) along the third axis at a node, or half a cell after it.
  Complex sum(const Problem& p, int node, long steps) const {
    Marcher<double> marcher(p, 1);
    const Component c = te() ? electric(third()) : magnetic(third());
    Index3 index{0, 0, 0};
    index[at(request_.across)] = te() && width_ > 1 ? width_ / 2 : 0;
    const int n = p.lattice.cells(request_.along);
    index[at(request_.along)] = request_.high ? node : te() ? n - node : n - 1 - node;
    const double* value = marcher.fields().row(c, index[0], index[1]) + index[2];
    Complex total = 0.0;
    for (long step = 1; step <= steps; ++step) {
      marcher.advance(1, {});
      total += *value * std::exp(Complex(0.0, -omega_ * static_cast<double>(step) * dt_s_));
    }
    return total;
  }

 private:
  static std::size_t at(Axis a) { return static_cast<std::size_t>(index_of(a)); }
  Axis third() const { return static_cast<Axis>(3 - index_of(request_.along) - index_of(request_.across)); }
  double position_m(const Problem& p, double node) const {
    return (request_.high ? node : p.lattice.cells(request_.along) - node) * request_.cell_m;
  }
  static void set_periodic(Problem& p, Axis axis) {
    for (const bool high : {false, true})
      p.faces[static_cast<std::size_t>(index_of(side_of(axis, high)))].kind = FaceKind::periodic;
    p.lattice.periodic[at(axis)] = true;
  }

  const ColumnRequest& request_;
  double across_m_, dt_s_;
  int width_ = 1;
  double omega_ = 0.0, cutoff_ = 0.0, kt_per_m_ = 0.0;
};

}  // namespace

ColumnReading read_column(const ColumnRequest& request) {
  if (!(request.angle_rad >= 0.0 && request.angle_rad < 0.5 * pi))
    throw std::invalid_argument("a column is read at angles from 0 to less than 90 degrees");
  if (request.medium.conductivity_s_per_m != 0.0)
    throw std::invalid_argument("a column is read in a lossless medium");
  const Guide guide(request);
  const double speed =
      c0_m_per_s / std::sqrt(request.medium.permittivity_rel * request.medium.permeability_rel);
  const double group = speed * std::max(std::cos(request.angle_rad), 0.02);
  ColumnReading reading;
  reading.dt_s = guide.dt_s();
  // What the layer holds back comes out within some crossings.
  const double layer_m = (gap + 4.0 * std::max(request.face.cells(), 1)) * request.cell_m;
  reading.steps = static_cast<long>((guide.pulse_s() + 8.0 * layer_m / group) / reading.dt_s);
  const int reach =
      static_cast<int>(0.55 * static_cast<double>(reading.steps) * reading.dt_s * speed / request.cell_m) +
      20;
  const int source = reach, at = source + 4;
  Problem with = guide.problem(at + gap, request.face), without = guide.problem(at + reach, Face{});
  guide.add_source(with, source);
  guide.add_source(without, source);
  const Complex incident = guide.sum(without, at, reading.steps), total = guide.sum(with, at, reading.steps);

  const Medium& medium = request.medium;
  const double k2 = lattice_medium(medium, guide.omega(), reading.dt_s).k_squared_per_m2().real();
  const Complex k = wavenumber_of_lattice(k2 - guide.kt_per_m() * guide.kt_per_m(), request.cell_m);
  const double distance_m = (guide.te() ? gap : gap - 0.5) * request.cell_m;
  reading.reflection = (guide.te() ? 1.0 : -1.0) * (total - incident) / incident *
                       std::exp(Complex(0.0, 2.0 * distance_m) * k);
  reading.wave = {guide.omega(), guide.kt_per_m() * guide.kt_per_m(), request.polarisation};
  reading.cells_per_wavelength = 2.0 * pi * speed / (guide.omega() * request.cell_m);
  return reading;
}

}  // namespace wanewall
