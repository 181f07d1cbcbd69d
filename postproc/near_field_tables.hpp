// Tables of the field at one point.
#pragma once

#include <string>
#include <vector>

#include "postproc/near_field.hpp"
#include "postproc/table_text.hpp"

namespace wanewall {

/// How a component was interpolated along one axis: "linear", "cubic", "on the plane".
std::string interpolation_text(int degree);

/// One row per component: how it was interpolated along each axis.
Table interpolation_table(const std::vector<FieldSeries>& series);
/// One row per component: its largest sample, when that was, and how far it had fallen at the end [dB].
Table probe_peak_table(const std::vector<FieldSeries>& series);
/// One row per recorded step. E and H have times of their own. Throws std::invalid_argument when components
/// of one kind were recorded at different steps.
Table probe_series_table(const std::vector<FieldSeries>& series);
/// One row per frequency: magnitude and phase, in degrees in (-180, 180], of each component.
Table probe_spectrum_table(const std::vector<FieldSeries>& series, const std::vector<double>& frequencies_hz);

}  // namespace wanewall
