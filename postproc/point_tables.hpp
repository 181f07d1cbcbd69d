// What the field did at the recorded points: peaks in time and spectra.
#pragma once

#include <complex>
#include <vector>

#include "postproc/table_text.hpp"
#include "solver/results.hpp"

namespace wanewall {

struct Peak {
  double value = 0.0;   ///< signed; V/m or A/m
  double time_s = 0.0;  ///< of the sample: n dt for E, (n + 1/2) dt for H
};

/// The sample of largest magnitude, the first of equals. A value of zero and time zero for a field that stays
/// zero. Samples that are not finite are passed over.
Peak peak_of(const PointSeries& point, Component component, double dt_s);

/// F = dt sum_n f(t_n) exp(-j omega t_n) with the component's own times; V s/m or A s/m.
std::complex<double> spectrum_at(const PointSeries& point, Component component, double dt_s,
                                 double frequency_hz);

/// One row per point and component.
Table peak_table(const std::vector<PointSeries>& points, double dt_s);
/// One row per point, component and frequency: magnitude, and phase in degrees in (-180, 180].
Table spectrum_rows(const std::vector<PointSeries>& points, double dt_s,
                    const std::vector<double>& frequencies_hz);
/// One row per frequency of one point: the magnitude of each component.
Table spectrum_table(const PointSeries& point, double dt_s, const std::vector<double>& frequencies_hz);

}  // namespace wanewall
