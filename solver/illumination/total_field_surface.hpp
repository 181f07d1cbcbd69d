// The closed surface inside which the total field lives and outside which only the scattered field does.
// Where a curl reaches across the surface, the incident field is added or taken away so that both sides see
// their own kind.
//   Source: D. E. Merewether, R. Fisher and F. W. Smith, IEEE Trans. Nucl. Sci. 27, 1829 (1980).
#pragma once

#include <memory>

#include "solver/illumination/incident_wave.hpp"
#include "solver/media_rows.hpp"

namespace wanewall {

template <class Real>
class TotalFieldSurface {
 public:
  /// Throws ProblemError when the surface crosses an object (its media must depend on z alone), when an
  /// oblique wave meets layers, or when the medium at the entry is lossy.
  TotalFieldSurface(const Problem& problem, const MediaRows<Real>& e_media, const MediaRows<Real>& h_media);

  IncidentWave& wave() { return *wave_; }
  /// Must be told, by one thread, before the rows of a step: values kept from the last step are then out of
  /// date.
  void begin_step();
  const WaveMedium& medium() const { return medium_; }

  /// True when row (i, j) has terms to add to E (or H) at all.
  bool touches_e(int i, int j) const { return touches(i, j, true); }
  bool touches_h(int i, int j) const { return touches(i, j, false); }
  /// Adds the surface terms of row (i, j); `own` are the three components' rows at k = 0.
  void add_e(int i, int j, Real* const own[3]) const { add(i, j, own, true); }
  void add_h(int i, int j, Real* const own[3]) const { add(i, j, own, false); }

 private:
  bool touches(int i, int j, bool electric) const;
  void add(int i, int j, Real* const own[3], bool electric) const;
  /// Index range of the surface's components along an axis.
  IndexRange extent(Component c, Axis a) const;

  /// Incident value at row (i, j) on a z face. Rows of one plane i come one after another, so the whole line
  /// along y is sampled once per thread and kept.
  double on_z_face(Component source, bool high, int i, int j, int k, bool electric) const;

  Lattice lattice_;
  PlaneWave plane_wave_;
  long generation_ = 0;
  WaveMedium medium_;
  std::unique_ptr<IncidentWave> wave_;
  std::array<std::vector<double>, 3> e_gain_, h_gain_;  // [component][k]
};

}  // namespace wanewall
