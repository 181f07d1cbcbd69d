// The audit's numbers (reflection_table.hpp) laid out as tables.
#pragma once

#include <optional>
#include <string>

#include "postproc/reflection_table.hpp"
#include "postproc/table_text.hpp"

namespace wanewall {

/// For people. Levels are in dB of power.
/// One row per face: its worst readings over the frequencies, near the normal and over all angles.
/// goal_db: what the scene asked of the shell.
Table overview_table(const AuditReport& report, const std::optional<double>& goal_db = {});
/// One row per frequency of a face: powers and total reflection. Columns that do not apply to the face are
/// left out.
Table power_table(const FaceReport& face);
/// Whether a face's power travels in more than one bin of incidence angle; if not, power_table() says it all.
bool has_angles(const FaceReport& face);
/// One row per polarisation and bin of incidence angle. Bins without plane waves are left out.
Table angle_table(const FaceReading& reading);

/// For programs: one row per face and frequency.
Table power_rows(const AuditReport& report);
/// One row per face, frequency, polarisation and bin of incidence angle; bins without plane waves are left
/// out.
Table reflection_rows(const AuditReport& report);

/// "-31.4", "< -25.0 (floor)" or "no reading".
std::string reflection_text(const Reflection& reflection);
/// Measured minus expected; empty where only a bound is known or nothing is expected.
std::string excess_text(const Reflection& reflection, const std::optional<double>& expected_db);
/// Whether a face holds the goal and is as designed.
std::string verdict_text(const FaceReport& face, const std::optional<double>& goal_db);

}  // namespace wanewall
