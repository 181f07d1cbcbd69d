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
};

/// What a layer does to the differences along one axis: nothing; cfs_pml memory; for E the differences are
/// given, already through the Moebius layer; for H Moebius memory, which acts before it takes in the new
/// difference.
enum class Along { plain, cfs, given, late };

/// The stretched difference of one component along one axis, at k.
template <class Real, Along along>
inline typename Vector<Real>::Aligned stretched(typename Vector<Real>::Aligned difference, Real inv, Real b,
                                                Real c, Real* psi, const Real* given, int k,
                                                std::ptrdiff_t psi_ahead) {
  using V = Vector<Real>;
  if constexpr (along == Along::given) {
    return inv * V::load(given + k);
  } else if constexpr (along == Along::plain) {
    return inv * difference;
  } else {
    __builtin_prefetch(psi + k + psi_ahead, 1);
    const auto old = V::load(psi + k);
    const auto memory = b * old + c * difference;
    V::store(psi + k, memory);
    return inv * difference + (along == Along::late ? old : memory);
  }
}

template <class Real, bool mixed>
inline void move(Real* own, int k, int in_span, int length, const MediaSpan<Real>& span, int component,
                 typename Vector<Real>::Aligned curl) {
  using V = Vector<Real>;
  if constexpr (mixed) {
    const Real* decay = span.mixed + (2 * component) * length + in_span;
    const Real* gain = span.mixed + (2 * component + 1) * length + in_span;
    V::store(own + k, V::load(decay) * V::load(own + k) + V::load(gain) * curl);
  } else {
    V::store(own + k, span.decay[component] * V::load(own + k) + span.gain[component] * curl);
  }
}

template <class Real, Along along_x, Along along_y, bool mixed>
void span_e(const RowTask<Real>& t, const MediaSpan<Real>& span) {
  using V = Vector<Real>;
  constexpr int line = 64 / static_cast<int>(sizeof(Real));
  const int length = span.end - span.begin;
  const Real *hx_row = t.other[0], *hy_row = t.other[1], *hz_row = t.other[2];
  const Real *hy_im = t.beside_x[1], *hz_im = t.beside_x[2], *hx_jm = t.beside_y[0], *hz_jm = t.beside_y[2];
  for (int k = span.begin; k < span.end; k += V::width) {
    // The next row's values are on their way while this one is computed; H rows follow E and find theirs in
    // cache.
    if (k % line == 0) {
      for (int c = 0; c < 3; ++c) {
        __builtin_prefetch(t.own[c] + k + t.ahead, 1);
        __builtin_prefetch(t.other[c] + k + t.ahead, 1);
      }
    }
    const auto hx = V::load(hx_row + k), hy = V::load(hy_row + k), hz = V::load(hz_row + k);
    const auto inv_z = V::load(t.inv_z + k);
    const auto dy_hz = stretched<Real, along_y>(hz - V::load(hz_jm + k), t.inv_y, t.y_b, t.y_c,
                                                t.y_psi_second, t.y_given_second, k, 2 * t.ahead);
    const auto dy_hx = stretched<Real, along_y>(hx - V::load(hx_jm + k), t.inv_y, t.y_b, t.y_c,
                                                t.y_psi_first, t.y_given_first, k, 2 * t.ahead);
    const auto dx_hy = stretched<Real, along_x>(hy - V::load(hy_im + k), t.inv_x, t.x_b, t.x_c,
                                                t.x_psi_second, t.x_given_second, k, 2 * t.ahead);
    const auto dx_hz = stretched<Real, along_x>(hz - V::load(hz_im + k), t.inv_x, t.x_b, t.x_c,
                                                t.x_psi_first, t.x_given_first, k, 2 * t.ahead);
    const auto dz_hy = inv_z * (hy - V::load_any(hy_row + k - 1));
    const auto dz_hx = inv_z * (hx - V::load_any(hx_row + k - 1));
    const int s = k - span.begin;
    move<Real, mixed>(t.own[0], k, s, length, span, 0, dy_hz - dz_hy);
    move<Real, mixed>(t.own[1], k, s, length, span, 1, dz_hx - dx_hz);
    move<Real, mixed>(t.own[2], k, s, length, span, 2, dx_hy - dy_hx);
  }
}

template <class Real, Along along_x, Along along_y, bool mixed>
void span_h(const RowTask<Real>& t, const MediaSpan<Real>& span) {
  using V = Vector<Real>;
  const int length = span.end - span.begin;
  const Real *ex_row = t.other[0], *ey_row = t.other[1], *ez_row = t.other[2];
  const Real *ey_ip = t.beside_x[1], *ez_ip = t.beside_x[2], *ex_jp = t.beside_y[0], *ez_jp = t.beside_y[2];
  for (int k = span.begin; k < span.end; k += V::width) {
    const auto ex = V::load(ex_row + k), ey = V::load(ey_row + k), ez = V::load(ez_row + k);
    const auto inv_z = V::load(t.inv_z + k);
    const auto dy_ez = stretched<Real, along_y>(V::load(ez_jp + k) - ez, t.inv_y, t.y_b, t.y_c,
                                                t.y_psi_second, t.y_given_second, k, 2 * t.ahead);
    const auto dy_ex = stretched<Real, along_y>(V::load(ex_jp + k) - ex, t.inv_y, t.y_b, t.y_c,
                                                t.y_psi_first, t.y_given_first, k, 2 * t.ahead);
    const auto dx_ey = stretched<Real, along_x>(V::load(ey_ip + k) - ey, t.inv_x, t.x_b, t.x_c,
                                                t.x_psi_second, t.x_given_second, k, 2 * t.ahead);
    const auto dx_ez = stretched<Real, along_x>(V::load(ez_ip + k) - ez, t.inv_x, t.x_b, t.x_c,
                                                t.x_psi_first, t.x_given_first, k, 2 * t.ahead);
    const auto dz_ey = inv_z * (V::load_any(ey_row + k + 1) - ey);
    const auto dz_ex = inv_z * (V::load_any(ex_row + k + 1) - ex);
    const int s = k - span.begin;
    move<Real, mixed>(t.own[0], k, s, length, span, 0, dz_ey - dy_ez);
    move<Real, mixed>(t.own[1], k, s, length, span, 1, dx_ez - dz_ex);
    move<Real, mixed>(t.own[2], k, s, length, span, 2, dy_ex - dx_ey);
  }
}

template <class Real, Along along_x, Along along_y>
void row_e(const RowTask<Real>& t) {
  for (int n = 0; n < t.n_spans; ++n) {
    if (t.spans[n].mixed)
      span_e<Real, along_x, along_y, true>(t, t.spans[n]);
    else
      span_e<Real, along_x, along_y, false>(t, t.spans[n]);
  }
}

template <class Real, Along along_x, Along along_y>
void row_h(const RowTask<Real>& t) {
  for (int n = 0; n < t.n_spans; ++n) {
    if (t.spans[n].mixed)
      span_h<Real, along_x, along_y, true>(t, t.spans[n]);
    else
      span_h<Real, along_x, along_y, false>(t, t.spans[n]);
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
  return {advance_e<Real>,      advance_h<Real>,       z_layer_e<Real>,   z_layer_h<Real>,
          z_layer_h_late<Real>, moebius_columns<Real>, z_moebius_e<Real>, name};
}

}  // namespace WANEWALL_VECTOR_NAMESPACE
}  // namespace wanewall
