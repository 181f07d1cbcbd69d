#include "geometry/painter.hpp"

#include <algorithm>
#include <atomic>
#include <bit>
#include <cmath>
#include <cstdint>
#include <map>

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

/// Quarter of the cell around an index, along one axis.
double quarter_m(const MeshLines& lines, bool half, int index) {
  return 0.25 * (half ? lines.cell_m(index) : lines.dual_m(index));
}

double inner_coordinate(double lo_m, double hi_m) {
  if (std::isfinite(lo_m) && std::isfinite(hi_m)) return 0.5 * (lo_m + hi_m);
  return std::isfinite(lo_m) ? lo_m : std::isfinite(hi_m) ? hi_m : 0.0;
}

/// A set of positions in a row, and how many of them lie below a given one.
class Cuts {
 public:
  void clear(int n) { words_.assign(static_cast<std::size_t>(n) / 64 + 1, 0); }
  void add(int at) { words_[static_cast<std::size_t>(at) / 64] |= std::uint64_t{1} << (at % 64); }
  /// Lists the positions in increasing order; needed before count_below.
  void list(std::vector<int>& positions) {
    positions.clear();
    before_.resize(words_.size());
    for (std::size_t w = 0; w < words_.size(); ++w) {
      before_[w] = static_cast<int>(positions.size());
      for (std::uint64_t left = words_[w]; left != 0; left &= left - 1)
        positions.push_back(static_cast<int>(w) * 64 + std::countr_zero(left));
    }
  }
  std::size_t count_below(int at) const {
    const auto w = static_cast<std::size_t>(at) / 64;
    const std::uint64_t below = words_[w] & ((std::uint64_t{1} << (at % 64)) - 1);
    return static_cast<std::size_t>(before_[w] + std::popcount(below));
  }

 private:
  std::vector<std::uint64_t> words_;
  std::vector<int> before_;
};

long next_serial() {
  static std::atomic<long> last{0};
  return ++last;
}

}  // namespace

Painter::Painter(const Lattice& lattice, const std::vector<Medium>& media, const std::vector<Object>& objects,
                 int background)
    : lattice_(lattice),
      media_(media),
      objects_(objects),
      background_(background),
      smallest_cell_m_(lattice.along(Axis::z).smallest_cell_m()),
      serial_(next_serial()) {
  for (Axis a : all_axes) smallest_cell_m_ = std::min(smallest_cell_m_, lattice.along(a).smallest_cell_m());
  tolerance_m_ = 1e-6 * smallest_cell_m_;
  const MeshLines& z = lattice.along(Axis::z);
  for (const bool half : {false, true}) {
    Samples& samples = z_[half];
    for (int k = 0; k < (half ? z.cells() : z.nodes()); ++k) {
      const double middle = half ? z.half_m(k) : z.node_m(k), quarter = quarter_m(z, half, k);
      samples.middle_m.push_back(middle);
      samples.below_m.push_back(middle - quarter);
      samples.above_m.push_back(middle + quarter);
    }
  }
  for (const Object& object : objects_) {
    bounds_.push_back(bounds_of(object.shape));
    block_in_z_.emplace_back();
    if (!is_block(object.shape)) continue;
    const Bounds& b = bounds_.back();
    const double x = inner_coordinate(b.lo_m[0], b.hi_m[0]), y = inner_coordinate(b.lo_m[1], b.hi_m[1]);
    const Interval grown = z_interval(object.shape, x, y, tolerance_m_),
                   bare = z_interval(object.shape, x, y, 0.0);
    for (const bool half : {false, true}) {
      const int n = static_cast<int>(z_[half].middle_m.size());
      const auto cover = [&](const std::vector<double>& z_m, const Interval& interval) {
        return interval.empty() ? IndexRange{} : covered(z_m.data(), n, interval);
      };
      block_in_z_.back()[half] = {cover(z_[half].middle_m, grown), cover(z_[half].below_m, bare),
                                  cover(z_[half].above_m, bare)};
    }
  }
  x_ = sort_indices(Axis::x);
  y_ = sort_indices(Axis::y);
}

Painter::Indices Painter::sort_indices(Axis axis) const {
  const MeshLines& lines = lattice_.along(axis);
  const auto a = static_cast<std::size_t>(index_of(axis));
  Indices indices;
  std::map<std::vector<Near>, int> known;
  for (const bool half : {false, true}) {
    for (int n = 0; n < (half ? lines.cells() : lines.nodes()); ++n) {
      const double middle = half ? lines.half_m(n) : lines.node_m(n), quarter = quarter_m(lines, half, n);
      std::vector<Near> near;
      for (std::size_t m = 0; m < objects_.size(); ++m) {
        // A whole cell more than the bounds, so that no rounding in them matters.
        const Bounds& bounds = bounds_[m];
        if (middle + quarter < bounds.lo_m[a] - smallest_cell_m_ ||
            middle - quarter > bounds.hi_m[a] + smallest_cell_m_)
          continue;
        const Shape& shape = objects_[m].shape;
        int positions = 0;
        if (is_block(shape)) {
          double xy[2]{inner_coordinate(bounds.lo_m[0], bounds.hi_m[0]),
                       inner_coordinate(bounds.lo_m[1], bounds.hi_m[1])};
          const auto meets = [&](double at_m, double tolerance_m) {
            xy[a] = at_m;
            return !z_interval(shape, xy[0], xy[1], tolerance_m).empty();
          };
          positions = (meets(middle, tolerance_m_) ? 1 : 0) | (meets(middle - quarter, 0.0) ? 2 : 0) |
                      (meets(middle + quarter, 0.0) ? 4 : 0);
          if (positions == 0) continue;
        }
        near.push_back({static_cast<int>(m), positions});
      }
      const auto [found, is_new] = known.try_emplace(near, static_cast<int>(indices.classes.size()));
      indices.class_of[half].push_back(found->second);
      if (!is_new) continue;
      Class added;
      for (const Near& one : near)
        if (!is_block(objects_[static_cast<std::size_t>(one.object)].shape))
          added.not_blocks.push_back(one.object);
      added.near = std::move(near);
      indices.classes.push_back(std::move(added));
    }
  }
  return indices;
}

const Painter::Class& Painter::class_at(Component c, Axis axis, int index) const {
  const Indices& indices = axis == Axis::x ? x_ : y_;
  return indices
      .classes[static_cast<std::size_t>(indices.class_of[is_half(c, axis)][static_cast<std::size_t>(index)])];
}

void Painter::row(Component c, int i, int j, std::vector<Paint>& out) const {
  row(c, i, j, lattice_.stored(c, Axis::z), out);
}

void Painter::row(Component c, int i, int j, IndexRange k, std::vector<Paint>& out) const {
  thread_local std::vector<PaintRun> stretches;
  runs(c, i, j, k, stretches);
  out.resize(static_cast<std::size_t>(k.size()));
  for (const PaintRun& stretch : stretches)
    std::fill(out.begin() + (stretch.begin - k.begin), out.begin() + (stretch.end - k.begin), stretch.paint);
}

void Painter::runs(Component c, int i, int j, IndexRange k, std::vector<PaintRun>& out) const {
  // The last row of each component that only blocks cover: most often the next one is the same.
  struct Remembered {
    long serial = 0;
    const Class *x = nullptr, *y = nullptr;
    IndexRange k;
    std::vector<PaintRun> runs;
  };
  thread_local std::array<Remembered, 6> remembered;
  thread_local std::vector<Mark> marks;

  const Class &x = class_at(c, Axis::x, i), &y = class_at(c, Axis::y, j);
  Remembered& last = remembered[static_cast<std::size_t>(index_of(c))];
  if (last.serial == serial_ && last.x == &x && last.y == &y && last.k == k) {
    out = last.runs;
    return;
  }
  marks.clear();
  bool only_blocks = true;
  for (auto in_x = x.near.begin(), in_y = y.near.begin(); in_x != x.near.end() && in_y != y.near.end();) {
    if (in_x->object < in_y->object) {
      ++in_x;
    } else if (in_y->object < in_x->object) {
      ++in_y;
    } else {
      if (is_block(objects_[static_cast<std::size_t>(in_x->object)].shape)) {
        mark_block(*in_x, *in_y, is_half(c, Axis::z), k, marks);
      } else {
        only_blocks = false;
        mark_other(in_x->object, c, i, j, k, marks);
      }
      ++in_x;
      ++in_y;
    }
  }
  paint_marks(c, marks, k, out);
  if (only_blocks) last = {serial_, &x, &y, k, out};
}

bool Painter::surely_equal(Component c, int i, int j, int i2, int j2) const {
  const Class &x = class_at(c, Axis::x, i), &y = class_at(c, Axis::y, j);
  if (&x != &class_at(c, Axis::x, i2) || &y != &class_at(c, Axis::y, j2)) return false;
  for (auto in_x = x.not_blocks.begin(), in_y = y.not_blocks.begin();
       in_x != x.not_blocks.end() && in_y != y.not_blocks.end();) {
    if (*in_x == *in_y) return i == i2 && j == j2;
    ++(*in_x < *in_y ? in_x : in_y);
  }
  return true;
}

void Painter::mark_block(const Near& in_x, const Near& in_y, bool half_z, IndexRange k,
                         std::vector<Mark>& marks) const {
  const auto& in_z = block_in_z_[static_cast<std::size_t>(in_x.object)][half_z];
  const auto within = [&](const IndexRange& whole) {
    return IndexRange{std::clamp(whole.begin, k.begin, k.end) - k.begin,
                      std::clamp(whole.end, k.begin, k.end) - k.begin};
  };
  Mark mark;
  mark.medium = objects_[static_cast<std::size_t>(in_x.object)].medium;
  if (in_x.positions & in_y.positions & 1) mark.covered[0] = within(in_z[0]);
  for (int line = 0; line < 4; ++line) {
    if (!(in_x.positions & (line & 1 ? 4 : 2)) || !(in_y.positions & (line & 2 ? 4 : 2))) continue;
    for (std::size_t level = 0; level < 2; ++level)
      mark.covered[1 + 2 * static_cast<std::size_t>(line) + level] = within(in_z[1 + level]);
  }
  marks.push_back(mark);
}

void Painter::mark_other(int object, Component c, int i, int j, IndexRange k,
                         std::vector<Mark>& marks) const {
  const Samples& samples = z_[is_half(c, Axis::z)];
  const Bounds& bounds = bounds_[static_cast<std::size_t>(object)];
  const int n = k.size();
  const double *middle = samples.middle_m.data() + k.begin, *below = samples.below_m.data() + k.begin,
               *above = samples.above_m.data() + k.begin;
  if (n == 0 || above[n - 1] < bounds.lo_m[2] - smallest_cell_m_ ||
      below[0] > bounds.hi_m[2] + smallest_cell_m_)
    return;
  const Shape& shape = objects_[static_cast<std::size_t>(object)].shape;
  const double x = lattice_.position_m(c, Axis::x, i), y = lattice_.position_m(c, Axis::y, j);
  const double dx = quarter_m(lattice_.along(Axis::x), is_half(c, Axis::x), i);
  const double dy = quarter_m(lattice_.along(Axis::y), is_half(c, Axis::y), j);
  Mark mark;
  mark.medium = objects_[static_cast<std::size_t>(object)].medium;
  const Interval inside = z_interval(shape, x, y, tolerance_m_);
  if (!inside.empty()) mark.covered[0] = covered(middle, n, inside);
  for (std::size_t line = 0; line < 4; ++line) {
    const double xs = x + (line & 1 ? dx : -dx), ys = y + (line & 2 ? dy : -dy);
    const Interval on_line = z_interval(shape, xs, ys, 0.0);
    if (on_line.empty()) continue;
    mark.covered[1 + 2 * line] = covered(below, n, on_line);
    mark.covered[2 + 2 * line] = covered(above, n, on_line);
  }
  marks.push_back(mark);
}

void Painter::paint_marks(Component c, const std::vector<Mark>& marks, IndexRange k,
                          std::vector<PaintRun>& out) const {
  thread_local Cuts cuts;
  thread_local std::vector<int> begins;
  thread_local std::vector<std::array<int, n_samples>> media;  // of the samples between two cuts
  out.clear();
  const int n = k.size();
  if (n == 0) return;
  cuts.clear(n);
  cuts.add(0);
  cuts.add(n);
  for (const Mark& mark : marks) {
    for (const IndexRange& range : mark.covered) {
      if (range.size() == 0) continue;
      cuts.add(range.begin);
      cuts.add(range.end);
    }
  }
  cuts.list(begins);
  std::array<int, n_samples> background;
  background.fill(background_);
  media.assign(begins.size() - 1, background);
  for (const Mark& mark : marks) {
    for (std::size_t sample = 0; sample < n_samples; ++sample) {
      const IndexRange& range = mark.covered[sample];
      if (range.size() == 0) continue;
      const std::size_t end = cuts.count_below(range.end);
      for (std::size_t m = cuts.count_below(range.begin); m < end; ++m) media[m][sample] = mark.medium;
    }
  }
  for (std::size_t m = 0; m < media.size(); ++m) {
    if (m > 0 && media[m] == media[m - 1]) {
      out.back().end = k.begin + begins[m + 1];
      continue;
    }
    const Paint paint = paint_of(c, media[m]);
    if (!out.empty() && out.back().paint == paint) {
      out.back().end = k.begin + begins[m + 1];
    } else {
      out.push_back({k.begin + begins[m], k.begin + begins[m + 1], paint});
    }
  }
}

Paint Painter::paint_of(Component c, const std::array<int, n_samples>& media) const {
  const bool electric = is_electric(c);
  const auto sample = [&](std::size_t n) {
    return sample_of(media_[static_cast<std::size_t>(media[n])], electric);
  };
  const Sample centre = sample(0);
  if (centre.perfect) return {1.0, 0.0, true};
  if (std::all_of(media.begin(), media.end(), [&](int medium) { return medium == media[0]; }))
    return {centre.relative, centre.loss, false};
  // The field's own axis decides which of the eight samples follow one another along it.
  const Axis along = axis_of(c);
  std::array<std::array<Sample, 4>, 2> ends;
  std::array<std::size_t, 2> filled{};
  for (std::size_t line = 0; line < 4; ++line) {
    for (std::size_t level = 0; level < 2; ++level) {
      const std::size_t end = along == Axis::x ? (line & 1) : along == Axis::y ? (line >> 1) : level;
      ends[end][filled[end]++] = sample(1 + 2 * line + level);
    }
  }
  const Sample mean = in_series(side_by_side(ends[0].data(), 4), side_by_side(ends[1].data(), 4));
  if (mean.perfect) return {1.0, 0.0, true};
  return {mean.relative, mean.loss, false};
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
