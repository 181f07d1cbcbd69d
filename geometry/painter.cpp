#include "geometry/painter.hpp"

#include <algorithm>
#include <array>
#include <cmath>

namespace wanewall {
namespace {

/// Indices of the increasing z that lie in an interval.
IndexRange covered(const double* z_m, int n, const Interval& interval) {
  return {static_cast<int>(std::lower_bound(z_m, z_m + n, interval.lo_m) - z_m),
          static_cast<int>(std::upper_bound(z_m, z_m + n, interval.hi_m) - z_m)};
}

/// Weights of one sample of the mean: the field's own constant and its loss.
struct Sample {
  double relative, loss;
  bool perfect;
};

Sample sample_of(const Medium& medium, bool electric) {
  return electric ? Sample{medium.permittivity_rel, medium.conductivity_s_per_m, medium.perfect_electric}
                  : Sample{medium.permeability_rel, medium.magnetic_conductivity_ohm_per_m,
                           medium.perfect_magnetic};
}

/// Mean over `n` samples side by side (the field is continuous from one to the next); conductors are left
/// out.
Sample side_by_side(const Sample* samples, int n) {
  Sample mean{0.0, 0.0, false};
  int used = 0;
  for (int i = 0; i < n; ++i) {
    if (samples[i].perfect) continue;
    mean.relative += samples[i].relative;
    mean.loss += samples[i].loss;
    ++used;
  }
  if (used == 0) return {1.0, 0.0, true};
  mean.relative /= used;
  mean.loss /= used;
  return mean;
}

/// Mean of two samples one after the other along the field (the flux is continuous).
Sample in_series(const Sample& a, const Sample& b) {
  if (a.perfect) return b;
  if (b.perfect) return a;
  if (a.relative == b.relative && a.loss == b.loss) return a;
  const double relative = 2.0 * a.relative * b.relative / (a.relative + b.relative);
  const double loss =
      relative * relative * 0.5 * (a.loss / (a.relative * a.relative) + b.loss / (b.relative * b.relative));
  return {relative, loss, false};
}

}  // namespace

Painter::Painter(const Lattice& lattice, const std::vector<Medium>& media, const std::vector<Object>& objects,
                 int background)
    : lattice_(lattice), media_(media), objects_(objects), background_(background) {
  const MeshLines& z = lattice.along(Axis::z);
  double smallest = z.smallest_cell_m();
  for (Axis a : all_axes) smallest = std::min(smallest, lattice.along(a).smallest_cell_m());
  tolerance_m_ = 1e-6 * smallest;
  for (int k = 0; k < z.nodes(); ++k) {
    const double quarter = 0.25 * z.dual_m(k);
    node_z_m_.push_back(z.node_m(k));
    node_z_lo_m_.push_back(z.node_m(k) - quarter);
    node_z_hi_m_.push_back(z.node_m(k) + quarter);
  }
  for (int k = 0; k < z.cells(); ++k) {
    const double quarter = 0.25 * z.cell_m(k);
    half_z_m_.push_back(z.half_m(k));
    half_z_lo_m_.push_back(z.half_m(k) - quarter);
    half_z_hi_m_.push_back(z.half_m(k) + quarter);
  }
}

void Painter::sample_line(double x_m, double y_m, const double* z_m, int n, double tolerance_m,
                          std::vector<int>& medium_of_sample) const {
  medium_of_sample.assign(static_cast<std::size_t>(n), background_);
  for (const Object& object : objects_) {
    const Interval interval = z_interval(object.shape, x_m, y_m, tolerance_m);
    if (interval.empty()) continue;
    const IndexRange range = covered(z_m, n, interval);
    if (range.size() > 0)
      std::fill(medium_of_sample.begin() + range.begin, medium_of_sample.begin() + range.end, object.medium);
  }
}

void Painter::row(Component c, int i, int j, std::vector<Paint>& out) const {
  row(c, i, j, lattice_.stored(c, Axis::z), out);
}

void Painter::row(Component c, int i, int j, IndexRange k_range, std::vector<Paint>& out) const {
  const bool electric = is_electric(c);
  const bool half_z = is_half(c, Axis::z);
  const double* z = (half_z ? half_z_m_ : node_z_m_).data() + k_range.begin;
  const double* z_lo = (half_z ? half_z_lo_m_ : node_z_lo_m_).data() + k_range.begin;
  const double* z_hi = (half_z ? half_z_hi_m_ : node_z_hi_m_).data() + k_range.begin;
  const int n = k_range.size();
  const double x = lattice_.position_m(c, Axis::x, i);
  const double y = lattice_.position_m(c, Axis::y, j);
  const auto quarter = [&](Axis a, int index) {
    return 0.25 * (is_half(c, a) ? lattice_.along(a).cell_m(index) : lattice_.along(a).dual_m(index));
  };
  const double dx = quarter(Axis::x, i), dy = quarter(Axis::y, j);

  thread_local std::vector<int> middle;
  thread_local std::array<std::array<std::vector<int>, 2>, 4> corner;  // [4 lines][z below, z above]
  sample_line(x, y, z, n, tolerance_m_, middle);
  for (std::size_t line = 0; line < 4; ++line) {
    const double xs = x + (line & 1 ? dx : -dx), ys = y + (line & 2 ? dy : -dy);
    sample_line(xs, ys, z_lo, n, 0.0, corner[line][0]);
    sample_line(xs, ys, z_hi, n, 0.0, corner[line][1]);
  }

  // The field's own axis decides which of the eight samples follow one another along it.
  const Axis along = axis_of(c);
  out.resize(static_cast<std::size_t>(n));
  for (std::size_t k = 0; k < out.size(); ++k) {
    const int here = middle[k];
    bool same = true;
    for (std::size_t line = 0; line < 4; ++line)
      same = same && corner[line][0][k] == here && corner[line][1][k] == here;
    const Sample centre = sample_of(media_[static_cast<std::size_t>(here)], electric);
    if (centre.perfect) {
      out[k] = {1.0, 0.0, true};
      continue;
    }
    if (same) {
      out[k] = {centre.relative, centre.loss, false};
      continue;
    }
    std::array<std::array<Sample, 4>, 2> ends;
    std::array<int, 2> filled{};
    for (std::size_t line = 0; line < 4; ++line) {
      for (std::size_t level = 0; level < 2; ++level) {
        const std::size_t end = along == Axis::x ? (line & 1) : along == Axis::y ? (line >> 1) : level;
        const int medium = corner[line][level][k];
        ends[end][static_cast<std::size_t>(filled[end]++)] =
            sample_of(media_[static_cast<std::size_t>(medium)], electric);
      }
    }
    const Sample mean = in_series(side_by_side(ends[0].data(), 4), side_by_side(ends[1].data(), 4));
    out[k] = {mean.relative, mean.loss, mean.perfect};
    if (mean.perfect) out[k] = {1.0, 0.0, true};
  }
}

int Painter::medium_at(const Vec3& point_m) const {
  int medium = background_;
  for (const Object& object : objects_) {
    const Interval interval = z_interval(object.shape, point_m[0], point_m[1], tolerance_m_);
    if (!interval.empty() && interval.lo_m <= point_m[2] && point_m[2] <= interval.hi_m)
      medium = object.medium;
  }
  return medium;
}

}  // namespace wanewall
