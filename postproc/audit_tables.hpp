// The audit's numbers (reflection_table.hpp) laid out as tables.
#pragma once

#include <string>

#include "postproc/reflection_table.hpp"
#include "postproc/table_text.hpp"

namespace wanewall {

/// For people. Levels are in dB of power.
/// One row per face: its worst readings over the frequencies, near the normal and over all angles.
Table overview_table(const AuditReport& report);
/// One row per frequency of a face: powers and total reflection. Columns that do not apply to the face are
/// left out.
Table power_table(const FaceReport& face);
/// Whether a face's power travels in more than one bin of incidence angle; if not, power_table() says it all.
bool has_angles(const FaceReport& face);
/// One row per bin of incidence angle, TE and TM side by side. Bins without plane waves are left out.
Table angle_table(const FaceReading& reading);

/// For programs: one row per face and frequency.
Table power_rows(const AuditReport& report);
/// One row per face, frequency, polarisation and bin of incidence angle; bins without plane waves are left
/// out.
Table reflection_rows(const AuditReport& report);

/// "-31.4", "< -25.0 (floor)" or "no reading".
std::string reflection_text(const Reflection& reflection);

}  // namespace wanewall
