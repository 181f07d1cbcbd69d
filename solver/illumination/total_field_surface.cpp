#include "solver/illumination/total_field_surface.hpp"

#include <algorithm>
#include <cmath>

#include "geometry/constants.hpp"

namespace wanewall {
namespace {

std::size_t at(Axis a) {
  return static_cast<std::size_t>(index_of(a));
}

/// Whether two rows carry the same coefficients for one component over a range of k.
template <class Real>
bool same(const RowMedia<Real>& a, const RowMedia<Real>& b, int component, IndexRange k) {
  if (&a == &b) return true;
  for (int n = k.begin; n < k.end; ++n) {
    const UpdateCoefficients p = a.at(component, n), q = b.at(component, n);
    if (p.decay != q.decay || p.gain != q.gain) return false;
  }
  return true;
}

}  // namespace

template <class Real>
IndexRange TotalFieldSurface<Real>::extent(Component c, Axis a) const {
  const int lo = plane_wave_.box_lo[at(a)], hi = plane_wave_.box_hi[at(a)];
  const bool periodic = lattice_.periodic[at(a)];
  return {lo, is_half(c, a) || periodic ? hi : hi + 1};
}

template <class Real>
TotalFieldSurface<Real>::TotalFieldSurface(const Problem& problem, const MediaRows<Real>& e_media,
                                           const MediaRows<Real>& h_media)
    : lattice_(problem.lattice), plane_wave_(*problem.plane_wave) {
  const PlaneWave& wave = plane_wave_;
  const int nz = lattice_.cells(Axis::z);
  const Vec3 direction = propagation_of(wave);

  // The media of the surface's own column. A row away from the walls, so that its coefficients are those of
  // the media.
  const int i0 =
      std::clamp(wave.box_lo[0], 1, std::max(1, lattice_.cells(Axis::x) - 1)) % lattice_.cells(Axis::x);
  const int j0 =
      std::clamp(wave.box_lo[1], 1, std::max(1, lattice_.cells(Axis::y) - 1)) % lattice_.cells(Axis::y);
  const RowMedia<Real>& e_column = e_media.row(i0, j0);
  const RowMedia<Real>& h_column = h_media.row(i0, j0);
  LayeredColumn column;
  for (int c = 0; c < 3; ++c) {
    e_gain_[static_cast<std::size_t>(c)].resize(static_cast<std::size_t>(nz) + 1);
    h_gain_[static_cast<std::size_t>(c)].resize(static_cast<std::size_t>(nz) + 1);
  }
  for (int k = 0; k <= nz; ++k) {
    for (int c = 0; c < 3; ++c) {
      e_gain_[static_cast<std::size_t>(c)][static_cast<std::size_t>(k)] = e_column.at(c, k).gain;
      h_gain_[static_cast<std::size_t>(c)][static_cast<std::size_t>(k)] = h_column.at(c, k).gain;
    }
    column.e.push_back(e_column.at(0, k));
    column.h.push_back(h_column.at(0, k));
  }

  for (const bool electric : {true, false}) {
    std::vector<char>& has_side_terms = has_side_terms_[electric ? 0 : 1];
    has_side_terms.assign(static_cast<std::size_t>(lattice_.cells(Axis::x) + 1) *
                              static_cast<std::size_t>(lattice_.cells(Axis::y) + 1),
                          0);
    for (Term& term : make_terms(electric)) {
      if (term.normal == Axis::z) {
        const auto component = static_cast<std::size_t>(index_of(axis_of(term.corrected)));
        term.z_factor = term.factor_per_m *
                        (electric ? e_gain_ : h_gain_)[component][static_cast<std::size_t>(term.target)];
        z_terms_[electric ? 0 : 1].push_back(term);
        continue;
      }
      side_terms_[electric ? 0 : 1].push_back(term);
      for (int i = term.x.begin; i < term.x.end; ++i)
        for (int j = term.y.begin; j < term.y.end; ++j)
          has_side_terms[static_cast<std::size_t>(i) * static_cast<std::size_t>(lattice_.cells(Axis::y) + 1) +
                         static_cast<std::size_t>(j)] = 1;
    }
  }

  // Every row that the surface touches must be like that column.
  for (const bool electric : {true, false}) {
    const MediaRows<Real>& media = electric ? e_media : h_media;
    const RowMedia<Real>& reference = electric ? e_column : h_column;
    for (int i = std::max(wave.box_lo[0] - 1, 0); i <= wave.box_hi[0]; ++i) {
      for (int j = std::max(wave.box_lo[1] - 1, 0); j <= wave.box_hi[1]; ++j) {
        if (!touches(i, j, electric)) continue;
        for (int c = 0; c < 3; ++c) {
          const Component component =
              electric ? wanewall::electric(static_cast<Axis>(c)) : magnetic(static_cast<Axis>(c));
          if (!extent(component, Axis::x).contains(i) || !extent(component, Axis::y).contains(j)) continue;
          const bool on_side =
              (wave.box_face[0] && i == wave.box_lo[0]) || (wave.box_face[1] && i == wave.box_hi[0]) ||
              (wave.box_face[2] && j == wave.box_lo[1]) || (wave.box_face[3] && j == wave.box_hi[1]);
          std::vector<IndexRange> ranges;
          if (on_side) {
            ranges.push_back(extent(component, Axis::z));
          } else {
            if (wave.box_face[4]) ranges.push_back({wave.box_lo[2], wave.box_lo[2] + 1});
            if (wave.box_face[5]) ranges.push_back({wave.box_hi[2], wave.box_hi[2] + 1});
          }
          for (const IndexRange& range : ranges) {
            if (!same(media.row(i, j), reference, c, range))
              throw ProblemError(
                  "plane wave: an object crosses the total-field surface near x = " +
                  std::to_string(lattice_.along(Axis::x).node_m(i)) +
                  " m, y = " + std::to_string(lattice_.along(Axis::y).node_m(j)) +
                  " m / allowed there: layers along z that run through all sides / make the clear volume "
                  "larger or the object smaller");
          }
        }
      }
    }
  }

  // The medium that carries the wave in, and whether the surface sees any other.
  const bool from_above = direction[2] < 0.0 || (direction[2] == 0.0);
  const int entry_k = from_above ? wave.box_hi[2] - 1 : wave.box_lo[2] + 1;
  const UpdateCoefficients e_entry = column.e[static_cast<std::size_t>(std::clamp(entry_k, 1, nz - 1))];
  const UpdateCoefficients h_entry = column.h[static_cast<std::size_t>(std::clamp(entry_k, 0, nz - 1))];
  if (e_entry.gain == 0.0 || h_entry.gain == 0.0)
    throw ProblemError(
        "plane wave: the wave would enter through a perfect conductor / let it enter through a medium");
  if (e_entry.decay != 1.0 || h_entry.decay != 1.0)
    throw ProblemError(
        "plane wave: the medium through which the wave enters is lossy / allowed: no conductivity there / "
        "use the "
        "lossless part of the medium for the layer the wave comes through");
  medium_.permittivity_rel = c0_m_per_s * lattice_.dt_s / e_entry.gain;
  medium_.permeability_rel = c0_m_per_s * lattice_.dt_s / h_entry.gain;
  bool layered = false;
  const bool sides = wave.box_face[0] || wave.box_face[1] || wave.box_face[2] || wave.box_face[3];
  const int first = sides || wave.box_face[4] ? std::max(wave.box_lo[2] - 1, 1) : wave.box_hi[2] - 1;
  const int last = sides || wave.box_face[5] ? std::min(wave.box_hi[2] + 1, nz - 1) : wave.box_lo[2] + 1;
  for (int k = first; k <= last; ++k) {
    layered = layered || column.e[static_cast<std::size_t>(k)].gain != e_entry.gain ||
              column.e[static_cast<std::size_t>(k)].decay != 1.0 ||
              column.h[static_cast<std::size_t>(std::min(k, nz - 1))].gain != h_entry.gain;
  }
  if (!layered) {
    wave_ = make_homogeneous_wave(lattice_, wave, medium_);
    return;
  }
  if (direction[0] != 0.0 || direction[1] != 0.0)
    throw ProblemError(
        "plane wave: oblique incidence on layered media / allowed on layers: theta 0 deg or 180 deg / for "
        "other angles "
        "keep the total-field surface inside one medium");
  const int outside = from_above ? wave.box_hi[2] + 1 : wave.box_lo[2] - 1;
  if (column.e[static_cast<std::size_t>(std::clamp(outside, 1, nz - 1))].gain != e_entry.gain ||
      column.e[static_cast<std::size_t>(std::clamp(outside, 1, nz - 1))].decay != 1.0)
    throw ProblemError(
        "plane wave: a layer ends at the entry of the total-field surface / leave two cells between them");
  wave_ = make_layered_wave(lattice_, wave, medium_, column, problem.stop.at_s + 2.0 * lattice_.dt_s);
}

template <class Real>
bool TotalFieldSurface<Real>::touches(int i, int j, bool electric) const {
  const PlaneWave& w = plane_wave_;
  const int back = electric ? 0 : 1;  // H half a cell outside the low faces
  const auto within = [&](int index, std::size_t a) { return w.box_lo[a] <= index && index <= w.box_hi[a]; };
  if (within(j, 1) && ((w.box_face[0] && i == w.box_lo[0] - back) || (w.box_face[1] && i == w.box_hi[0])))
    return true;
  if (within(i, 0) && ((w.box_face[2] && j == w.box_lo[1] - back) || (w.box_face[3] && j == w.box_hi[1])))
    return true;
  return (w.box_face[4] || w.box_face[5]) && within(i, 0) && within(j, 1);
}

/// E: curl_u holds -d H_v/d n and curl_v holds +d H_u/d n; Faraday's law has the other sign. A total-field
/// target lacks the incident part of its scattered neighbour, a scattered-field target has one too many of
/// its total neighbour.
template <class Real>
std::vector<typename TotalFieldSurface<Real>::Term> TotalFieldSurface<Real>::make_terms(bool electric) const {
  std::vector<Term> terms;
  for (Side side : all_sides) {
    if (!plane_wave_.box_face[static_cast<std::size_t>(index_of(side))]) continue;
    const Axis normal = axis_of(side);
    const bool high = is_high(side);
    const int node = high ? plane_wave_.box_hi[at(normal)] : plane_wave_.box_lo[at(normal)];
    for (const bool first : {true, false}) {
      const Axis u = first ? next(normal) : previous(normal);
      const Axis v = first ? previous(normal) : next(normal);
      Term term;
      term.normal = normal;
      term.high = high;
      term.corrected = electric ? wanewall::electric(u) : magnetic(u);
      term.source = electric ? magnetic(v) : wanewall::electric(v);
      // H is corrected half a cell outside the face, E on it; the source lies on the other side of the face.
      term.target = electric || high ? node : node - 1;
      term.source_index = electric && !high ? node - 1 : node;
      const MeshLines& lines = lattice_.along(normal);
      const double inv_d = 1.0 / (electric ? lines.dual_m(node) : lines.cell_m(term.target));
      term.factor_per_m = inv_d * (first == high ? -1.0 : 1.0) * (electric ? 1.0 : -1.0);
      const IndexRange here{term.target, term.target + 1};
      term.x = normal == Axis::x ? here : extent(term.corrected, Axis::x);
      term.y = normal == Axis::y ? here : extent(term.corrected, Axis::y);
      term.z = normal == Axis::z ? here : extent(term.corrected, Axis::z);
      terms.push_back(term);
    }
  }
  return terms;
}

template <class Real>
void TotalFieldSurface<Real>::sample_z_faces(bool electric, int i, int j_begin, int j_end, int slot,
                                             ZFaceLines& lines) const {
  lines.j_begin = j_begin;
  lines.j_end = j_end;
  const std::vector<Term>& terms = z_terms_[electric ? 0 : 1];
  for (std::size_t t = 0; t < terms.size(); ++t) {
    const Term& term = terms[t];
    const int begin = std::max(j_begin, term.y.begin), end = std::min(j_end, term.y.end);
    lines.heard[t] = {};
    if (!term.x.contains(i) || begin >= end) continue;
    if (lines.values[t].size() < static_cast<std::size_t>(j_end - j_begin))
      lines.values[t].resize(static_cast<std::size_t>(j_end - j_begin));
    const IndexRange heard = wave_->line_y(slot, term.source, i, begin, term.source_index, end - begin,
                                           lines.values[t].data() + (begin - j_begin));
    lines.heard[t] = {begin + heard.begin, begin + heard.end};
  }
}

template <class Real>
void TotalFieldSurface<Real>::add(bool electric, int i, int j, int slot, const ZFaceLines& lines,
                                  Real* const own[3]) const {
  const std::size_t field = electric ? 0 : 1;
  if (has_side_terms_[field]
                     [static_cast<std::size_t>(i) * static_cast<std::size_t>(lattice_.cells(Axis::y) + 1) +
                      static_cast<std::size_t>(j)]) {
    thread_local std::vector<double> incident;
    for (const Term& term : side_terms_[field]) {
      if (!term.x.contains(i) || !term.y.contains(j)) continue;
      Index3 from{i, j, term.z.begin};
      from[at(term.normal)] = term.source_index;
      incident.resize(static_cast<std::size_t>(term.z.size()));
      const IndexRange heard =
          wave_->row(slot, term.source, from[0], from[1], from[2], term.z.size(), incident.data());
      const int component = index_of(axis_of(term.corrected));
      const double* gain =
          (electric ? e_gain_ : h_gain_)[static_cast<std::size_t>(component)].data() + term.z.begin;
      add_(own[component] + term.z.begin + heard.begin, term.factor_per_m, gain + heard.begin,
           incident.data() + heard.begin, heard.size());
    }
  }
  const std::vector<Term>& terms = z_terms_[field];
  for (std::size_t t = 0; t < terms.size(); ++t) {
    const Term& term = terms[t];
    if (!lines.heard[t].contains(j)) continue;
    own[index_of(axis_of(term.corrected))][term.target] +=
        static_cast<Real>(term.z_factor * lines.values[t][static_cast<std::size_t>(j - lines.j_begin)]);
  }
}

template <class Real>
void TotalFieldSurface<Real>::prepare(const StepBlock& block) {
#pragma omp single
  {
    block_ = block;
    wave_->hold(block.n);
    is_active_.clear();
    for (long step = block.first; step < block.end(); ++step) is_active_.push_back(wave_->is_active(step));
  }
  const int parts = wave_->n_parts();
#pragma omp for schedule(dynamic, 1) nowait
  for (int piece = 0; piece < parts * block_.n; ++piece)
    if (is_active(piece / parts)) wave_->prepare(block_.first + piece / parts, piece / parts, piece % parts);
}

template class TotalFieldSurface<float>;
template class TotalFieldSurface<double>;

}  // namespace wanewall
