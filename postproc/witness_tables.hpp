// What a run behind a much thicker shell says about the shell of the first one.
#pragma once

#include "postproc/compare.hpp"
#include "postproc/table_text.hpp"

namespace wanewall {

/// One row per point and field: what the shell changed at most, in dB of the field's peak and as an error bar
/// in the field's unit. Where the change is below `floor_db`, which is what the witness itself may return,
/// only the bound is known, and it is printed as one. `comparison`: the run against the witness as the
/// reference.
Table witness_point_table(const Comparison& comparison, double floor_db);

/// The same per audited face and frequency, for the Fourier sums on the audit planes; the error bars are rms
/// values over the clear cross-section.
Table witness_face_table(const Comparison& comparison, double floor_db);

/// The error bar of a field [V/m or A/m]: its largest change, but no less than the floor.
double error_bar(const FieldError& error, double floor_db);

}  // namespace wanewall
