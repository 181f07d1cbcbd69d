// Quantities with SI units written out: "6 mm", "0.4 GHz", "-60 dB". A bare number is never a quantity.
#pragma once

#include <string>
#include <string_view>
#include <vector>

namespace wanewall {

/// What a quantity measures; each family has its own units. Values are kept in the family's first unit in the
/// brackets.
enum class Family {
  length,                 ///< [m]
  time,                   ///< [s]
  frequency,              ///< [Hz]
  angle,                  ///< [rad]
  level,                  ///< [dB]
  conductivity,           ///< [S/m]
  magnetic_conductivity,  ///< [ohm/m]
  electric_field,         ///< [V/m]
  current_moment,         ///< I l [A m]
  voltage_moment,         ///< K l [V m]
  steps,                  ///< time steps, a whole number
  cells                   ///< cells of the mesh, a whole number
};

struct Unit {
  std::string_view name;
  double factor;  ///< value in the base unit of one of this unit
};

std::string_view name_of(Family family);  ///< "length", "magnetic conductivity", ...
std::string with_article(Family family);  ///< "a length", "an angle", ...
const std::vector<Family>& all_families();
/// All units of a family, smallest first.
const std::vector<Unit>& units_of(Family family);
/// A unit of the family that scenes often use, for examples: "mm", "GHz".
std::string_view usual_unit(Family family);
/// The units of a family for a message: "nm, um, mm, cm, m, km".
std::string unit_list(Family family);
/// True where only whole numbers make sense (steps, cells).
bool is_counted(Family family);

enum class QuantityFault { none, empty, not_a_number, not_finite, no_unit, wrong_unit, not_whole };

struct ParsedQuantity {
  double value = 0.0;  ///< in the family's base unit
  QuantityFault fault = QuantityFault::none;
  std::string unit;  ///< what stood behind the number
  explicit operator bool() const { return fault == QuantityFault::none; }
};

/// Reads the whole of `text` as a number and a unit of the family, with or without blanks between them. The
/// point is the decimal sign whatever the locale.
ParsedQuantity parse_quantity(std::string_view text, Family family);

/// Reads the whole of `text` as a plain number; fault is none, empty, not_a_number, not_finite, or wrong_unit
/// when something stands behind the number.
ParsedQuantity parse_number(std::string_view text);

/// Reads the whole of `text` as a whole number; fault as for parse_number, and not_whole.
ParsedQuantity parse_whole(std::string_view text);

/// A value in the unit that makes it easiest to read, with at most `digits` significant digits: "10 mm",
/// "19.07 ps".
std::string format_quantity(double value, Family family, int digits = 6);
/// The same for a plain number.
std::string format_number(double value, int digits = 6);

}  // namespace wanewall
