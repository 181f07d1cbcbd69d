// The closed surface inside which the total field lives and outside which only the scattered field does.
// Where a curl reaches across the surface, the incident field is added or taken away so that both sides see
// their own kind.
//   Source: D. E. Merewether, R. Fisher and F. W. Smith, IEEE Trans. Nucl. Sci. 27, 1829 (1980).
#pragma once

#include <memory>

#include "solver/illumination/incident_wave.hpp"
#include "solver/media_rows.hpp"
#include "solver/recorders/recorder.hpp"
#include "solver/table_kernels.hpp"

namespace wanewall {

template <class Real>
class TotalFieldSurface {
 public:
  /// Throws ProblemError when the surface crosses an object (its media must depend on z alone), when an
  /// oblique wave meets layers, or when the medium at the entry is lossy.
  TotalFieldSurface(const Problem& problem, const MediaRows<Real>& e_media, const MediaRows<Real>& h_media);

  IncidentWave& wave() { return *wave_; }
  /// Prepares for a block of steps, by all threads of a region; a barrier must follow.
  void prepare(const StepBlock& block);
  /// Whether the wave is there at a step of the block.
  bool is_active(int slot) const { return is_active_[static_cast<std::size_t>(slot)] != 0; }
  const WaveMedium& medium() const { return medium_; }

  /// True when row (i, j) has terms to add to E (or H) at all.
  bool touches_e(int i, int j) const { return touches(i, j, true); }
  bool touches_h(int i, int j) const { return touches(i, j, false); }
  /// Incident values on the faces across z, for rows j_begin .. j_end - 1 of one plane at one step.
  struct ZFaceLines {
    int j_begin = 0, j_end = 0;
    std::array<std::vector<double>, 4> values;  // by term
    std::array<IndexRange, 4> heard;            // the j that have one
  };
  void sample_z_faces(bool electric, int i, int j_begin, int j_end, int slot, ZFaceLines& lines) const;

  /// Adds the surface terms of row (i, j) at the block's step `slot`; `own` are the three components' rows at
  /// k = 0, `lines` those of the row's plane and step.
  void add(bool electric, int i, int j, int slot, const ZFaceLines& lines, Real* const own[3]) const;

 private:
  /// One face's correction of one tangential component: field += factor gain(k) incident(source).
  struct Term {
    Axis normal = Axis::x;
    bool high = false;
    Component corrected = Component::ex, source = Component::hx;
    int target = 0;        ///< index of the corrected component along the normal
    int source_index = 0;  ///< index of the incident component along the normal
    double factor_per_m = 0.0;
    double z_factor = 0.0;  ///< of faces across z: with the gain at the target
    IndexRange x, y, z;     ///< where the corrected component exists on the face; one index along the normal
  };
  std::vector<Term> make_terms(bool electric) const;
  bool touches(int i, int j, bool electric) const;
  /// Index range of the surface's components along an axis.
  IndexRange extent(Component c, Axis a) const;
  Lattice lattice_;
  PlaneWave plane_wave_;
  StepBlock block_;
  std::vector<char> is_active_;  // [slot]
  // Rows that terms of faces across x and y belong to: [E, H][i (ny + 1) + j].
  std::array<std::vector<char>, 2> has_side_terms_;
  AddIncident<Real> add_ = add_incident<Real>(best_vector_code());
  WaveMedium medium_;
  std::unique_ptr<IncidentWave> wave_;
  std::array<std::vector<double>, 3> e_gain_, h_gain_;  // [component][k]
  // Terms of faces across x and y, which whole rows belong to, and of faces across z, which cross every row.
  std::array<std::vector<Term>, 2> side_terms_, z_terms_;  // [E, H]
};

}  // namespace wanewall
