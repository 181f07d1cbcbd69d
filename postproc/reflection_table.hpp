// The shell audit as numbers: per face and frequency, power through the audit plane and, where the split
// applies, reflection per polarisation and bin of incidence angle with its floor.
#pragma once

#include <array>
#include <optional>
#include <string>
#include <vector>

#include "geometry/lattice.hpp"
#include "postproc/plane_power.hpp"
#include "solver/results.hpp"

namespace wanewall {

/// Returned power relative to outgoing power, with what its floor leaves open. On field level, r =
/// sqrt(returned / outgoing), f = sqrt(floor / outgoing): the truth lies between |r| - f and r + f.
struct Reflection {
  enum class Kind {
    value,       ///< f <= r/2: read value_db, between low_db and high_db
    bound,       ///< f > r/2: only "at most high_db" is known
    no_reading,  ///< nothing outgoing, or the bound is not below 0 dB while f > r/2
  };
  Kind kind = Kind::no_reading;
  double value_db = 0.0;  ///< 20 log r, also where only the bound is known
  double low_db = 0.0;    ///< 20 log(r - f); -infinity unless kind is value
  double high_db = 0.0;   ///< 20 log(r + f)
  double floor_db = 0.0;  ///< 20 log f
};
/// Powers in one and the same unit, none negative.
Reflection reflection_of(double outgoing, double returned, double floor);

struct AngleReading {
  double outgoing_w_s2 = 0.0, returned_w_s2 = 0.0;
  /// Outgoing power relative to the face's, both polarisations and all angles [dB]; -infinity where there is
  /// none.
  double share_db = 0.0;
  Reflection reflection;
  long waves = 0;  ///< plane waves in the bin; 0: the bin is empty
  /// Outgoing share below -20 dB: what the bin holds is the skirts of other angles.
  bool not_illuminated = false;
  /// What should be read by the layer's theory, through the same window; empty without a theory.
  std::optional<double> expected_db;
};

/// The two readings are TE and TM, indexed by Polarisation.
struct AngleRow {
  double lo_deg = 0.0, hi_deg = 0.0;
  std::array<AngleReading, 2> readings;
  /// 2 (g + N) d tan(theta) > L/2 at the bin's middle: a wave comes back so far to the side, or ends in a
  /// side shell, that less returns than an infinite face would reflect. L: shortest tapered clear width, (g +
  /// N) d: from plane 0 to the outer wall.
  bool walk_off = false;
  std::optional<double> infinite_face_db;  ///< the layer's theory at the bin's middle
};

/// What a face reads over a range of angles, both polarisations together.
struct AngleSum {
  double outgoing_w_s2 = 0.0, returned_w_s2 = 0.0;
  double share_db = 0.0;  ///< of the face's outgoing power
  Reflection reflection;
  bool not_illuminated = false;
  std::optional<double> expected_db;
};

/// A face as a whole, by norms of the fields over the whole plane with its side shells (face_split.hpp).
struct WholeReading {
  Reflection reflection;  ///< its floor is the three-plane floor
  std::optional<double> expected_db;
  std::optional<double> closure_db;  ///< what came back and is not expected, relative to what went out
};

/// Above this three-plane floor a modal split is not to be trusted far [dB].
inline constexpr double floor_warning_db = -100.0;

/// The range in which a tapered basis still reads well.
inline constexpr double near_normal_deg = 40.0;

struct FaceReading {
  double frequency_hz = 0.0;
  std::optional<NetPower> net;
  /// The scene's plane wave through this face's clear cross-section; empty without one or when it runs along
  /// the face.
  std::optional<double> incident_w_s2;
  /// Empty when the face is not split. Powers stand for the clear cross-section.
  std::vector<AngleRow> rows;
  std::optional<WholeReading> whole;          ///< where the split is by the lattice's own modes
  AngleSum total;                             ///< all angles
  AngleSum near_normal;                       ///< bins up to near_normal_deg
  std::array<Reflection, 2> by_polarisation;  ///< all angles
};

struct FaceReport {
  Side side = Side::x_lo;
  FaceKind kind = FaceKind::electric_wall;
  std::string not_split_because;  ///< empty: the face is split
  std::string basis;              ///< the functions of the split
  bool basis_is_exact = false;
  bool basis_is_modal = false;
  /// Why the face is split under tapers and not by the lattice's own modes; empty where it is.
  std::string not_separable_because;
  bool is_layered = false;      ///< media change along z; the angles are read in the deepest of them
  bool goes_on_to_wall = true;  ///< false: something else lies in the face's own shell
  double permittivity_rel = 1.0, permeability_rel = 1.0, conductivity_s_per_m = 0.0;
  int shell_cells = 0;
  double plane_m = 0.0;  ///< coordinate of node plane 0 along the normal
  double clear_area_m2 = 0.0;
  std::vector<FaceReading> readings;  ///< one per chosen frequency
};

struct AuditReport {
  std::vector<FaceReport> faces;
};

struct ReportChoice {
  std::vector<Side> faces;               ///< empty: all that were audited
  std::vector<std::size_t> frequencies;  ///< indices into AuditRecord::frequencies_hz; empty: all
  int angle_bins = 9;                    ///< equal bins from 0 to 90 degrees
};

/// Throws std::invalid_argument when the record's planes do not fit its lattice.
AuditReport audit_report(const AuditRecord& audit, const Lattice& lattice, const ReportChoice& choice);

/// What the readings of all frequencies say of a face.
struct FaceVerdict {
  std::optional<double> worst_db;       ///< largest reading, or bound, over the frequencies; none: no reading
  std::optional<double> unexpected_db;  ///< largest closure, or floor where that is above it
  /// Whether what came back is what the layer's theory says: the closure lies within the floor, or 20 dB
  /// under the reading. Empty without a theory or without a modal split.
  std::optional<bool> as_designed;
  std::optional<bool> holds_goal;  ///< every reading and every bound at or below the goal; empty without one
  bool misses_goal = false;        ///< some reading is above the goal; false with holds_goal false: not shown
};
/// Beyond the floor with its margin: a residue that varies linearly along the normal escapes the third plane.
/// Up to 4.5 dB was seen, at -136 dB, where records end in static fields
/// (tests/published/test_shell_audit.cpp).
inline constexpr double closure_margin_db = 6.0;
FaceVerdict verdict_of(const FaceReport& face, const std::optional<double>& goal_db);

/// The reading whose reflection, or bound, is the largest over the frequencies: over all angles or near the
/// normal. Null when the face is not split or not illuminated.
enum class AngleRange { all, near_normal };
const FaceReading* worst_reading(const FaceReport& face, AngleRange range);
const AngleSum& sum_over(const FaceReading& reading, AngleRange range);

}  // namespace wanewall
