#include "solver/media_rows.hpp"

#include <omp.h>

#include <algorithm>
#include <cmath>
#include <cstring>
#include <string>

#include "geometry/constants.hpp"
#include "geometry/painter.hpp"
#include "solver/shell/moebius.hpp"

namespace wanewall {
namespace {

/// Loss rate sigma/eps [1/s] that the matched slabs add, at every node and half node of an axis.
struct SlabLoss {
  std::vector<double> node, half;
};

SlabLoss slab_loss(const Problem& problem, Axis axis) {
  const int n = problem.lattice.cells(axis);
  SlabLoss loss{std::vector<double>(static_cast<std::size_t>(n) + 1, 0.0),
                std::vector<double>(static_cast<std::size_t>(n), 0.0)};
  for (const bool high : {false, true}) {
    const Side side = side_of(axis, high);
    const Face& face = problem.face(side);
    if (face.kind != FaceKind::matched_slab) continue;
    const int cells = face.layer.cells();
    for (int d = 0; d < cells; ++d) {
      const auto node = static_cast<std::size_t>(high ? n - cells + d : cells - d);
      const auto half = static_cast<std::size_t>(high ? n - cells + d : cells - 1 - d);
      loss.node[node] += face.layer.sigma_e_s_per_m[static_cast<std::size_t>(d)] / eps0_f_per_m;
      loss.half[half] += face.layer.sigma_h_s_per_m[static_cast<std::size_t>(d)] / eps0_f_per_m;
    }
  }
  return loss;
}

/// Coefficients from index `begin` up to the next run's.
struct CoefficientRun {
  int begin = 0;
  UpdateCoefficients value;
};

/// Update coefficients of whole rows before compression.
class RowPainter {
 public:
  RowPainter(const Problem& problem, bool electric)
      : problem_(problem),
        lattice_(problem.lattice),
        electric_(electric),
        painter_(problem.lattice, problem.media, problem.objects, problem.background),
        loss_{slab_loss(problem, Axis::x), slab_loss(problem, Axis::y), slab_loss(problem, Axis::z)} {
    for (std::size_t n = 0; n < 3; ++n) {
      const Component c = component(n);
      for (int k = 0; k <= lattice_.cells(Axis::z); ++k) {
        ZPart part{k, moves(c, Axis::z, k), 0.0};
        if (part.moves) part.loss_per_s = loss(c, Axis::z, k);
        auto& parts = z_parts_[n];
        if (parts.empty() || parts.back().moves != part.moves || parts.back().loss_per_s != part.loss_per_s)
          parts.push_back(part);
      }
    }
  }

  /// Decay and gain of component n, as runs that cover k = 0..nz. Neighbours may have the same value.
  void paint(std::size_t n, int i, int j, std::vector<CoefficientRun>& out) const {
    const Component c = component(n);
    out.clear();
    if (!moves(c, Axis::x, i) || !moves(c, Axis::y, j)) {
      out.push_back({0, {}});
      return;
    }
    thread_local std::vector<PaintRun> paint;
    painter_.runs(c, i, j, lattice_.stored(c, Axis::z), paint);
    const double side_loss = loss(c, Axis::x, i) + loss(c, Axis::y, j);
    const double vacuum = electric_ ? eps0_f_per_m : mu0_h_per_m;
    auto at = paint.begin();
    const auto& parts = z_parts_[n];
    for (std::size_t p = 0; p < parts.size(); ++p) {
      const ZPart& part = parts[p];
      const int end = p + 1 < parts.size() ? parts[p + 1].begin : lattice_.cells(Axis::z) + 1;
      if (!part.moves) {
        out.push_back({part.begin, {}});
        continue;
      }
      for (int k = part.begin; k < end; k = at->end) {
        while (at->end <= k) ++at;
        UpdateCoefficients value;
        if (!at->paint.perfect) {
          const double rate = at->paint.loss / (vacuum * at->paint.relative) + side_loss + part.loss_per_s;
          value = update_coefficients(at->paint.relative, rate, lattice_.dt_s);
        }
        out.push_back({k, value});
      }
    }
  }

  /// True only when the rows (i, j) and (i2, j2) of all three components are equal.
  bool surely_equal(int i, int j, int i2, int j2) const {
    for (std::size_t n = 0; n < 3; ++n) {
      const Component c = component(n);
      const bool here = moves(c, Axis::x, i) && moves(c, Axis::y, j);
      const bool there = moves(c, Axis::x, i2) && moves(c, Axis::y, j2);
      if (here != there) return false;
      if (!here) continue;
      if (loss(c, Axis::x, i) + loss(c, Axis::y, j) != loss(c, Axis::x, i2) + loss(c, Axis::y, j2))
        return false;
      if (!painter_.surely_equal(c, i, j, i2, j2)) return false;
    }
    return true;
  }

 private:
  /// A stretch of the z axis with one rate of loss from its layers, from `begin` to the next part's.
  struct ZPart {
    int begin = 0;
    bool moves = false;
    double loss_per_s = 0.0;
  };

  Component component(std::size_t n) const {
    const Axis along = all_axes[n];
    return electric_ ? electric(along) : magnetic(along);
  }

  double loss(Component c, Axis a, int index) const {
    const SlabLoss& along = loss_[static_cast<std::size_t>(index_of(a))];
    return (is_half(c, a) ? along.half : along.node)[static_cast<std::size_t>(index)];
  }

  /// False for indices that do not exist, are images on a periodic axis, or lie on an electric wall with E in
  /// it.
  bool moves(Component c, Axis a, int index) const {
    const int n = lattice_.cells(a);
    if (is_half(c, a)) return index < n;
    if (lattice_.periodic[static_cast<std::size_t>(index_of(a))]) return index < n;
    if (!electric_) return true;
    if (index == 0) return !wall_is_electric(problem_, side_of(a, false));
    if (index == n) return !wall_is_electric(problem_, side_of(a, true));
    return true;
  }

  const Problem& problem_;
  const Lattice& lattice_;
  bool electric_;
  Painter painter_;
  std::array<SlabLoss, 3> loss_;
  std::array<std::vector<ZPart>, 3> z_parts_;
};

template <class Real>
struct Pair {
  Real decay, gain;
  bool operator==(const Pair&) const = default;
};

/// Cuts a row into spans of whole cache lines; lines that hold one value per component and follow one another
/// join.
template <class Real>
RowMedia<Real> compress(const std::array<std::vector<Pair<Real>>, 3>& values) {
  constexpr int line = static_cast<int>(cache_line_bytes / sizeof(Real));
  const int length = static_cast<int>(values[0].size());
  RowMedia<Real> media;
  std::vector<bool> is_mixed;
  for (int begin = 0; begin < length; begin += line) {
    MediaSpan<Real> span;
    span.begin = begin;
    span.end = begin + line;
    bool uniform = true, still = true;
    for (std::size_t c = 0; c < 3; ++c) {
      const Pair<Real>* first = &values[c][static_cast<std::size_t>(begin)];
      uniform = uniform && std::all_of(first, first + line, [&](const Pair<Real>& p) { return p == *first; });
      still = still && std::all_of(first, first + line,
                                   [](const Pair<Real>& p) { return p.gain == 0 && p.decay == 0; });
      span.decay[c] = first->decay;
      span.gain[c] = first->gain;
    }
    if (still) continue;
    if (!media.spans.empty() && media.spans.back().end == begin) {
      MediaSpan<Real>& last = media.spans.back();
      const bool last_uniform = !is_mixed.back();
      if ((!uniform && !last_uniform) ||
          (uniform && last_uniform && std::equal(last.decay, last.decay + 3, span.decay) &&
           std::equal(last.gain, last.gain + 3, span.gain))) {
        last.end = span.end;
        continue;
      }
    }
    media.spans.push_back(span);
    is_mixed.push_back(!uniform);
  }
  std::size_t n_mixed = 0;
  for (std::size_t n = 0; n < media.spans.size(); ++n)
    if (is_mixed[n]) n_mixed += 6 * static_cast<std::size_t>(media.spans[n].end - media.spans[n].begin);
  media.mixed = AlignedArray<Real>(n_mixed);
  Real* next = media.mixed.data();
  for (std::size_t n = 0; n < media.spans.size(); ++n) {
    if (!is_mixed[n]) continue;
    MediaSpan<Real>& span = media.spans[n];
    span.mixed = next;
    for (const auto& component : values) {
      const auto first = component.begin() + span.begin, last = component.begin() + span.end;
      next = std::transform(first, last, next, [](const Pair<Real>& p) { return p.decay; });
      next = std::transform(first, last, next, [](const Pair<Real>& p) { return p.gain; });
    }
  }
  return media;
}

}  // namespace

UpdateCoefficients update_coefficients(double relative, double loss_rate_per_s, double dt_s) {
  const double s = 0.5 * loss_rate_per_s * dt_s;
  return {(1.0 - s) / (1.0 + s), c0_m_per_s * dt_s / (relative * (1.0 + s))};
}

template <class Real>
UpdateCoefficients RowMedia<Real>::at(int component, int k) const {
  for (const MediaSpan<Real>& span : spans) {
    if (k < span.begin || k >= span.end) continue;
    if (!span.mixed) return {span.decay[component], span.gain[component]};
    const int length = span.end - span.begin;
    const Real* decay = span.mixed + 2 * component * length + (k - span.begin);
    return {decay[0], decay[length]};
  }
  return {};
}

template <class Real>
MediaRows<Real>::MediaRows(const Problem& problem, const RowLayout& layout, bool electric, int threads)
    : ny_(layout.ny),
      rows_(static_cast<std::size_t>(layout.nx + 1) * static_cast<std::size_t>(layout.ny + 1)),
      pools_(static_cast<std::size_t>(threads)) {
  const RowPainter painter(problem, electric);
  const int lattice_nodes = problem.lattice.cells(Axis::z) + 1;
  const ZWindow windows[2]{z_window(problem, Side::z_lo, electric, layout, sizeof(Real)),
                           z_window(problem, Side::z_hi, electric, layout, sizeof(Real))};
#pragma omp parallel num_threads(threads)
  {
    auto& pool = pools_[static_cast<std::size_t>(omp_get_thread_num())];
    std::unordered_map<std::string, const RowMedia<Real>*> known;
    std::vector<CoefficientRun> painted;
    std::array<std::vector<std::pair<int, Pair<Real>>>, 3> runs;  // first index and value; neighbours differ
    std::array<std::vector<Pair<Real>>, 3> values;
    std::string key;
#pragma omp for schedule(static)
    for (int i = 0; i <= layout.nx; ++i) {
      for (int j = 0; j <= layout.ny; ++j) {
        const RowMedia<Real>*& row = rows_[static_cast<std::size_t>(i) * static_cast<std::size_t>(ny_ + 1) +
                                           static_cast<std::size_t>(j)];
        if (j > 0 && painter.surely_equal(i, j, i, j - 1)) {
          row = *(&row - 1);
          continue;
        }
        key.clear();
        for (std::size_t c = 0; c < 3; ++c) {
          painter.paint(c, i, j, painted);
          // Tangential E on the low wall is held at zero after the update. What its coefficients say does not
          // matter, and the first line of a uniform row stays uniform when they follow their neighbour.
          if (electric && c < 2 && painted.size() > 1 && painted[1].begin == 1 &&
              wall_is_electric(problem, Side::z_lo))
            painted[0].value = painted[1].value;
          runs[c].clear();
          for (const CoefficientRun& run : painted) {
            const Pair<Real> value{static_cast<Real>(run.value.decay), static_cast<Real>(run.value.gain)};
            if (!runs[c].empty() && runs[c].back().second == value) continue;
            runs[c].emplace_back(run.begin, value);
            key.append(reinterpret_cast<const char*>(&run.begin), sizeof run.begin);
            key.append(reinterpret_cast<const char*>(&value), sizeof value);
          }
          key.push_back('|');
        }
        auto& slot = known[key];
        if (!slot) {
          for (std::size_t c = 0; c < 3; ++c) {
            values[c].assign(static_cast<std::size_t>(layout.row), Pair<Real>{0, 0});
            for (std::size_t r = 0; r < runs[c].size(); ++r) {
              const int end = r + 1 < runs[c].size() ? runs[c][r + 1].first : lattice_nodes;
              std::fill(values[c].begin() + runs[c][r].first, values[c].begin() + end, runs[c][r].second);
            }
          }
          pool.push_back(compress(values));
          RowMedia<Real>& media = pool.back();
          for (const ZWindow& window : windows)
            for (std::size_t c = 0; c < 2; ++c)
              for (int m = 0; m < window.length; ++m) {
                const bool in_layer = m >= window.first && m < window.last;
                const auto k = static_cast<std::size_t>(window.begin + m);
                media.z_layer_gain.push_back(in_layer ? values[c][k].gain : Real(0));
              }
          slot = &media;
        }
        row = slot;
      }
    }
  }
}

template <class Real>
std::size_t MediaRows<Real>::bytes() const {
  std::size_t sum = rows_.size() * sizeof(rows_[0]);
  for (const auto& pool : pools_) {
    for (const auto& media : pool)
      sum += sizeof media + media.spans.size() * sizeof(MediaSpan<Real>) + media.mixed.size() * sizeof(Real) +
             media.z_layer_gain.size() * sizeof(Real);
  }
  return sum;
}

template struct RowMedia<float>;
template struct RowMedia<double>;
template class MediaRows<float>;
template class MediaRows<double>;

}  // namespace wanewall
