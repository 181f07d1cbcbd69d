// What two runs of the same scene have in common, and by how much they differ there: point series in time and
// over the band, and the sums of audit planes. Data in, data out.
#pragma once

#include <array>
#include <string>
#include <vector>

#include "geometry/lattice.hpp"
#include "postproc/table_text.hpp"
#include "solver/results.hpp"

namespace wanewall {

/// A run as far as it can be compared. Holds references; they must outlive it.
struct Compared {
  const Lattice& lattice;
  const RunResult& result;
};

/// The difference of one vector field, E or H, at one point. |.| is the norm over the three components.
struct FieldError {
  double reference_peak = 0.0;      ///< max_t |F_ref|; V/m or A/m
  std::vector<double> change;       ///< [step] |F - F_ref|; V/m or A/m
  double largest_change = 0.0;      ///< V/m or A/m
  double largest_at_s = 0.0;        ///< time of the largest change
  double peak_db = 0.0;             ///< 20 log10(largest change / reference peak)
  double rms_db = 0.0;              ///< 20 log10(rms_t |F - F_ref| / rms_t |F_ref|)
  std::vector<double> spectrum_db;  ///< [frequency] 20 log10(|DFT(F - F_ref)| / |DFT(F_ref)|)
};
// Levels are -infinity without a difference, and +infinity where a difference is not finite or has nothing to
// be related to, so that neither can pass for a small one.

struct PointError {
  std::string name;
  Vec3 position_m{};
  FieldError e, h;
};

/// Fourier sums of one face's audit planes that both hold, inside the clear cross-section that both share:
/// the norm over planes and positions of the difference.
struct FaceError {
  Side side = Side::x_lo;
  std::vector<double> frequencies_hz;
  std::vector<double> e_change_v_s_per_m, h_change_a_s_per_m;  ///< rms over the positions; per frequency
  std::vector<double> e_reference_v_s_per_m, h_reference_a_s_per_m;
  std::vector<double> e_db, h_db;  ///< relative to the same norm of the reference
};

struct Comparison {
  std::size_t steps = 0;  ///< samples compared, step 0 included: the shorter of the two series
  double dt_s = 0.0;
  std::vector<double> frequencies_hz;
  std::vector<PointError> points;
  std::vector<FaceError> faces;
  /// What could not be compared and why, one line each; what to keep in mind.
  std::vector<std::string> notes;
};

/// Compares what the two share: points of the same name and position, audit planes of the same face, position
/// and frequencies. Their lattices may differ in extent. Throws std::invalid_argument when the time steps
/// differ, and when a point's series are not as long as its run.
Comparison compare(const Compared& reference, const Compared& run, const std::vector<double>& frequencies_hz);

/// The point whose E has the largest peak error; null without points.
const PointError* worst_point(const Comparison& comparison);
/// Largest of the points' peak errors of E and H [dB]; -infinity without points or differences.
double worst_peak_db(const Comparison& comparison);
/// Largest of a field's spectrum_db; -infinity without any.
double worst_in_band_db(const FieldError& error);

/// One row per point and field: peak error with its time, rms, worst in the band.
Table point_error_table(const Comparison& comparison);
/// One row per frequency, one column per point and field.
Table band_error_table(const Comparison& comparison);
/// One row per face and frequency.
Table face_error_table(const Comparison& comparison);
/// All of it, for programs: one row per point or face, field and frequency.
Table comparison_rows(const std::string& record, const Comparison& comparison);

}  // namespace wanewall
