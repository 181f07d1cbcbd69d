// Included by row_kernels_*.cpp with WANEWALL_VECTOR_BYTES and WANEWALL_VECTOR_NAMESPACE set. Rows are
// padded, so there is no remainder: every span is a whole number of cache lines and every store is aligned.
#include <utility>

#include "solver/row_kernels.hpp"

namespace wanewall {
namespace WANEWALL_VECTOR_NAMESPACE {

template <class Real>
struct Vector {
  static constexpr int width = WANEWALL_VECTOR_BYTES / static_cast<int>(sizeof(Real));
  typedef Real Any __attribute__((vector_size(WANEWALL_VECTOR_BYTES), aligned(sizeof(Real)), may_alias));
  typedef Real Aligned __attribute__((vector_size(WANEWALL_VECTOR_BYTES), may_alias));
  static Aligned load(const Real* p) { return *reinterpret_cast<const Aligned*>(p); }
  static Aligned load_any(const Real* p) { return *reinterpret_cast<const Any*>(p); }
  static void store(Real* p, Aligned v) { *reinterpret_cast<Aligned*>(p) = v; }
  static Aligned all(Real value) { return value - Aligned{}; }
  /// Entry m is entry m - 1 of the row whose vectors are before and here: cheaper than a load across two lines.
  static Aligned shifted_down(Aligned before, Aligned here) {
    return shift<width - 1>(before, here, std::make_integer_sequence<int, width>());
  }
  /// Entry m is entry m + 1 of the row whose vectors are here and after.
  static Aligned shifted_up(Aligned here, Aligned after) {
    return shift<1>(here, after, std::make_integer_sequence<int, width>());
  }

 private:
  template <int by, int... m>
  static Aligned shift(Aligned low, Aligned high, std::integer_sequence<int, m...>) {
    return __builtin_shufflevector(low, high, (m + by)...);
  }
};

/// What a span is made of: one medium whose fields do not decay, one medium, or several.
enum class Media { lossless, uniform, mixed };

/// What a layer does to the differences along one axis: nothing; cfs_pml memory; for E the differences are
/// given, already through the Moebius layer; for H Moebius memory, which acts before it takes in the new
/// difference.
enum class Along { plain, cfs, given, late };

/// One axis of a task, held in registers: a store to a field might change the task itself, for all that the
/// compiler knows.
template <class Real, Along along>
struct AxisNumbers {
  using V = Vector<Real>;
  typename V::Aligned inv, b, c;
  Real *psi_first, *psi_second;
  const Real *given_first, *given_second;
  std::ptrdiff_t psi_ahead;

  /// The stretched difference of the first (or second) component that differs along the axis, at k.
  template <bool first>
  typename V::Aligned stretched(typename V::Aligned difference, std::ptrdiff_t k) const {
    if constexpr (along == Along::given) {
      return inv * V::load((first ? given_first : given_second) + k);
    } else if constexpr (along == Along::plain) {
      return inv * difference;
    } else {
      Real* const psi = (first ? psi_first : psi_second) + k;
      __builtin_prefetch(psi + psi_ahead, 1);
      const auto old = V::load(psi);
      const auto memory = b * old + c * difference;
      V::store(psi, memory);
      return inv * difference + (along == Along::late ? old : memory);
    }
  }
};

template <class Real, Along along>
AxisNumbers<Real, along> x_numbers(const RowTask<Real>& t) {
  using V = Vector<Real>;
  return {V::all(t.inv_x), V::all(t.x_b),   V::all(t.x_c),    t.x_psi_first,
          t.x_psi_second,  t.x_given_first, t.x_given_second, t.psi_ahead};
}
template <class Real, Along along>
AxisNumbers<Real, along> y_numbers(const RowTask<Real>& t) {
  using V = Vector<Real>;
  return {V::all(t.inv_y), V::all(t.y_b),   V::all(t.y_c),    t.y_psi_first,
          t.y_psi_second,  t.y_given_first, t.y_given_second, t.psi_ahead};
}

/// Decay and gain of one component of a span.
template <class Real, Media media>
struct SpanNumbers {
  using V = Vector<Real>;
  typename V::Aligned decay, gain;
  const Real *mixed_decay, *mixed_gain;  // at k = 0

  SpanNumbers(const MediaSpan<Real>& span, int component)
      : decay(V::all(span.decay[component])), gain(V::all(span.gain[component])) {
    if constexpr (media == Media::mixed) {
      const std::ptrdiff_t length = span.end - span.begin;
      mixed_decay = span.mixed + 2 * component * length - span.begin;
      mixed_gain = mixed_decay + length;
    }
  }
  typename V::Aligned moved(typename V::Aligned old, typename V::Aligned curl, std::ptrdiff_t k) const {
    if constexpr (media == Media::mixed)
      return V::load(mixed_decay + k) * old + V::load(mixed_gain + k) * curl;
    else if constexpr (media == Media::lossless)
      return old + gain * curl;
    else
      return decay * old + gain * curl;
  }
};

template <class Real, Along along_x, Along along_y, Media media>
void span_e(const RowTask<Real>& t, const MediaSpan<Real>& span) {
  using V = Vector<Real>;
  constexpr int line = 64 / static_cast<int>(sizeof(Real));
  Real *const ex = t.own[0], *const ey = t.own[1], *const ez = t.own[2];
  const Real *const hx_row = t.other[0], *const hy_row = t.other[1], *const hz_row = t.other[2];
  const Real *const hy_im = t.beside_x[1], *const hz_im = t.beside_x[2], *const hx_jm = t.beside_y[0],
                   *const hz_jm = t.beside_y[2], *const inv_z_row = t.inv_z;
  const auto x = x_numbers<Real, along_x>(t);
  const auto y = y_numbers<Real, along_y>(t);
  const SpanNumbers<Real, media> of_x(span, 0), of_y(span, 1), of_z(span, 2);
  const std::ptrdiff_t ahead = t.ahead, end = span.end, ahead_begin = t.ahead_begin;
  const auto ahead_length = static_cast<std::size_t>(t.ahead_end - ahead_begin);
  auto hx_before = V::all(hx_row[span.begin - 1]), hy_before = V::all(hy_row[span.begin - 1]);
  for (std::ptrdiff_t k = span.begin; k < end; k += V::width) {
    // What comes next is on its way while this row is computed; H rows follow E and find theirs in cache.
    if ((V::width == line || k % line == 0) && static_cast<std::size_t>(k - ahead_begin) < ahead_length) {
      for (Real* own : {ex, ey, ez}) __builtin_prefetch(own + k + ahead, 1, 2);
      for (const Real* other : {hx_row, hy_row, hz_row}) __builtin_prefetch(other + k + ahead, 1, 2);
    }
    const auto hx = V::load(hx_row + k), hy = V::load(hy_row + k), hz = V::load(hz_row + k);
    const auto inv_z = V::load(inv_z_row + k);
    const auto dy_hz = y.template stretched<false>(hz - V::load(hz_jm + k), k);
    const auto dy_hx = y.template stretched<true>(hx - V::load(hx_jm + k), k);
    const auto dx_hy = x.template stretched<false>(hy - V::load(hy_im + k), k);
    const auto dx_hz = x.template stretched<true>(hz - V::load(hz_im + k), k);
    const auto dz_hy = inv_z * (hy - V::shifted_down(hy_before, hy));
    const auto dz_hx = inv_z * (hx - V::shifted_down(hx_before, hx));
    hx_before = hx;
    hy_before = hy;
    const auto next_x = of_x.moved(V::load(ex + k), dy_hz - dz_hy, k);
    const auto next_y = of_y.moved(V::load(ey + k), dz_hx - dx_hz, k);
    const auto next_z = of_z.moved(V::load(ez + k), dx_hy - dy_hx, k);
    V::store(ex + k, next_x);
    V::store(ey + k, next_y);
    V::store(ez + k, next_z);
  }
}

template <class Real, Along along_x, Along along_y, Media media>
void span_h(const RowTask<Real>& t, const MediaSpan<Real>& span) {
  using V = Vector<Real>;
  Real *const hx = t.own[0], *const hy = t.own[1], *const hz = t.own[2];
  const Real *const ex_row = t.other[0], *const ey_row = t.other[1], *const ez_row = t.other[2];
  const Real *const ey_ip = t.beside_x[1], *const ez_ip = t.beside_x[2], *const ex_jp = t.beside_y[0],
                   *const ez_jp = t.beside_y[2], *const inv_z_row = t.inv_z;
  const auto x = x_numbers<Real, along_x>(t);
  const auto y = y_numbers<Real, along_y>(t);
  const SpanNumbers<Real, media> of_x(span, 0), of_y(span, 1), of_z(span, 2);
  const std::ptrdiff_t end = span.end;
  auto ex = V::load(ex_row + span.begin), ey = V::load(ey_row + span.begin);
  for (std::ptrdiff_t k = span.begin; k < end; k += V::width) {
    const auto ex_after = V::load(ex_row + k + V::width), ey_after = V::load(ey_row + k + V::width);
    const auto ez = V::load(ez_row + k);
    const auto inv_z = V::load(inv_z_row + k);
    const auto dy_ez = y.template stretched<false>(V::load(ez_jp + k) - ez, k);
    const auto dy_ex = y.template stretched<true>(V::load(ex_jp + k) - ex, k);
    const auto dx_ey = x.template stretched<false>(V::load(ey_ip + k) - ey, k);
    const auto dx_ez = x.template stretched<true>(V::load(ez_ip + k) - ez, k);
    const auto dz_ey = inv_z * (V::shifted_up(ey, ey_after) - ey);
    const auto dz_ex = inv_z * (V::shifted_up(ex, ex_after) - ex);
    const auto next_x = of_x.moved(V::load(hx + k), dz_ey - dy_ez, k);
    const auto next_y = of_y.moved(V::load(hy + k), dx_ez - dz_ex, k);
    const auto next_z = of_z.moved(V::load(hz + k), dy_ex - dx_ey, k);
    V::store(hx + k, next_x);
    V::store(hy + k, next_y);
    V::store(hz + k, next_z);
    ex = ex_after;
    ey = ey_after;
  }
}

template <class Real, Along along_x, Along along_y>
void row_e(const RowTask<Real>& t) {
  for (int n = 0; n < t.n_spans; ++n) {
    const MediaSpan<Real>& span = t.spans[n];
    if (span.mixed)
      span_e<Real, along_x, along_y, Media::mixed>(t, span);
    else if (span.decay[0] == Real(1) && span.decay[1] == Real(1) && span.decay[2] == Real(1))
      span_e<Real, along_x, along_y, Media::lossless>(t, span);
    else
      span_e<Real, along_x, along_y, Media::uniform>(t, span);
  }
}

template <class Real, Along along_x, Along along_y>
void row_h(const RowTask<Real>& t) {
  for (int n = 0; n < t.n_spans; ++n) {
    const MediaSpan<Real>& span = t.spans[n];
    if (span.mixed)
      span_h<Real, along_x, along_y, Media::mixed>(t, span);
    else if (span.decay[0] == Real(1) && span.decay[1] == Real(1) && span.decay[2] == Real(1))
      span_h<Real, along_x, along_y, Media::lossless>(t, span);
    else
      span_h<Real, along_x, along_y, Media::uniform>(t, span);
  }
}

template <class Real, Along along_x>
void choose_row_e(const RowTask<Real>& t) {
  t.y_given_first  ? row_e<Real, along_x, Along::given>(t)
  : t.y_psi_first ? row_e<Real, along_x, Along::cfs>(t)
                  : row_e<Real, along_x, Along::plain>(t);
}

template <class Real>
void advance_e(const RowTask<Real>& t) {
  t.x_given_first  ? choose_row_e<Real, Along::given>(t)
  : t.x_psi_first ? choose_row_e<Real, Along::cfs>(t)
                  : choose_row_e<Real, Along::plain>(t);
}

template <class Real, Along along_x>
void choose_row_h(const RowTask<Real>& t) {
  !t.y_psi_first ? row_h<Real, along_x, Along::plain>(t)
  : t.y_late     ? row_h<Real, along_x, Along::late>(t)
                 : row_h<Real, along_x, Along::cfs>(t);
}

template <class Real>
void advance_h(const RowTask<Real>& t) {
  !t.x_psi_first ? choose_row_h<Real, Along::plain>(t)
  : t.x_late     ? choose_row_h<Real, Along::late>(t)
                 : choose_row_h<Real, Along::cfs>(t);
}

#include "solver/layer_kernels.inl"

template <class Real>
RowKernels<Real> make_kernels(std::string_view name) {
  return {advance_e<Real>,
          advance_h<Real>,
          z_layer<Real, true, false>,
          z_layer<Real, false, false>,
          z_layer<Real, false, true>,
          moebius_columns<Real>,
          z_moebius_e<Real>,
          name};
}

}  // namespace WANEWALL_VECTOR_NAMESPACE
}  // namespace wanewall
