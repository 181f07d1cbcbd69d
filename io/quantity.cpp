#include "io/quantity.hpp"

#include <fmt/format.h>

#include <charconv>
#include <cmath>
#include <stdexcept>

#include "geometry/constants.hpp"

namespace wanewall {
namespace {

struct FamilyEntry {
  Family family;
  std::string_view name;
  bool counted;
  std::string_view usual;
  std::vector<Unit> units;
};

const std::vector<FamilyEntry>& families() {
  static const std::vector<FamilyEntry> table{
      {Family::length,
       "length",
       false,
       "mm",
       {{"nm", 1e-9}, {"um", 1e-6}, {"mm", 1e-3}, {"cm", 1e-2}, {"m", 1.0}, {"km", 1e3}}},
      {Family::time,
       "time",
       false,
       "ns",
       {{"fs", 1e-15}, {"ps", 1e-12}, {"ns", 1e-9}, {"us", 1e-6}, {"ms", 1e-3}, {"s", 1.0}}},
      {Family::frequency,
       "frequency",
       false,
       "GHz",
       {{"Hz", 1.0}, {"kHz", 1e3}, {"MHz", 1e6}, {"GHz", 1e9}, {"THz", 1e12}}},
      {Family::angle, "angle", false, "deg", {{"mrad", 1e-3}, {"deg", pi / 180.0}, {"rad", 1.0}}},
      {Family::level, "level", false, "dB", {{"dB", 1.0}}},
      {Family::conductivity,
       "conductivity",
       false,
       "S/m",
       {{"nS/m", 1e-9}, {"uS/m", 1e-6}, {"mS/m", 1e-3}, {"S/m", 1.0}, {"kS/m", 1e3}, {"MS/m", 1e6}}},
      {Family::magnetic_conductivity,
       "magnetic conductivity",
       false,
       "ohm/m",
       {{"mohm/m", 1e-3}, {"ohm/m", 1.0}, {"kohm/m", 1e3}, {"Mohm/m", 1e6}}},
      {Family::electric_field,
       "electric field",
       false,
       "V/m",
       {{"uV/m", 1e-6}, {"mV/m", 1e-3}, {"V/m", 1.0}, {"kV/m", 1e3}, {"MV/m", 1e6}}},
      {Family::current_moment,
       "current moment",
       false,
       "A m",
       {{"nA m", 1e-9}, {"uA m", 1e-6}, {"mA m", 1e-3}, {"A m", 1.0}, {"kA m", 1e3}}},
      {Family::voltage_moment,
       "voltage moment",
       false,
       "V m",
       {{"nV m", 1e-9}, {"uV m", 1e-6}, {"mV m", 1e-3}, {"V m", 1.0}, {"kV m", 1e3}}},
      {Family::steps, "number of steps", true, "steps", {{"step", 1.0}, {"steps", 1.0}}},
      {Family::cells, "number of cells", true, "cells", {{"cell", 1.0}, {"cells", 1.0}}}};
  return table;
}

const FamilyEntry& entry_of(Family family) {
  for (const FamilyEntry& entry : families())
    if (entry.family == family) return entry;
  throw std::logic_error("unit family without an entry");
}

bool is_blank(char c) {
  return c == ' ' || c == '\t';
}

std::string_view trimmed(std::string_view text) {
  while (!text.empty() && is_blank(text.front())) text.remove_prefix(1);
  while (!text.empty() && is_blank(text.back())) text.remove_suffix(1);
  return text;
}

/// One blank for any run of blanks, and a plain "u" for both micro signs of Unicode.
std::string plain_unit(std::string_view text) {
  std::string unit;
  for (std::size_t i = 0; i < text.size(); ++i) {
    const std::string_view rest = text.substr(i);
    if (rest.starts_with("\u00b5") || rest.starts_with("\u03bc")) {
      unit += 'u';
      ++i;
    } else if (!is_blank(text[i])) {
      unit += text[i];
    } else if (!unit.empty() && unit.back() != ' ') {
      unit += ' ';
    }
  }
  return unit;
}

/// The number at the start of a text; what is left of the text comes back in `rest`.
ParsedQuantity leading_number(std::string_view text, std::string_view& rest) {
  ParsedQuantity parsed;
  text = trimmed(text);
  rest = text;
  if (text.empty()) {
    parsed.fault = QuantityFault::empty;
    return parsed;
  }
  std::string_view digits = text;
  if (digits.front() == '+') digits.remove_prefix(1);
  const bool signed_twice = digits.size() < text.size() && !digits.empty() && digits.front() == '-';
  const auto [end, status] = std::from_chars(digits.data(), digits.data() + digits.size(), parsed.value);
  if (signed_twice || status == std::errc::invalid_argument) {
    parsed.fault = QuantityFault::not_a_number;
    return parsed;
  }
  rest = trimmed(digits.substr(static_cast<std::size_t>(end - digits.data())));
  if (status == std::errc::result_out_of_range || !std::isfinite(parsed.value))
    parsed.fault = QuantityFault::not_finite;
  return parsed;
}

}  // namespace

std::string_view name_of(Family family) {
  return entry_of(family).name;
}

const std::vector<Family>& all_families() {
  static const std::vector<Family> list = [] {
    std::vector<Family> all;
    for (const FamilyEntry& entry : families()) all.push_back(entry.family);
    return all;
  }();
  return list;
}

const std::vector<Unit>& units_of(Family family) {
  return entry_of(family).units;
}

std::string with_article(Family family) {
  const std::string_view name = name_of(family);
  return (std::string_view("aeiou").find(name.front()) == std::string_view::npos ? "a " : "an ") +
         std::string(name);
}

std::string_view usual_unit(Family family) {
  return entry_of(family).usual;
}

bool is_counted(Family family) {
  return entry_of(family).counted;
}

std::string unit_list(Family family) {
  std::string list;
  for (const Unit& unit : units_of(family)) {
    if (!list.empty()) list += ", ";
    list += unit.name;
  }
  return list;
}

ParsedQuantity parse_quantity(std::string_view text, Family family) {
  std::string_view rest;
  ParsedQuantity parsed = leading_number(text, rest);
  if (!parsed) return parsed;
  parsed.unit = plain_unit(rest);
  if (parsed.unit.empty()) {
    parsed.fault = QuantityFault::no_unit;
    return parsed;
  }
  const Unit* found = nullptr;
  for (const Unit& unit : units_of(family))
    if (unit.name == parsed.unit) found = &unit;
  if (found == nullptr) {
    parsed.fault = QuantityFault::wrong_unit;
    return parsed;
  }
  // 10 mm is the double nearest to 0.01, which 10 / 1000 gives and 10 * 0.001 need not.
  const double inverse = std::round(1.0 / found->factor);
  parsed.value = found->factor < 1.0 && std::abs(inverse * found->factor - 1.0) < 1e-15
                     ? parsed.value / inverse
                     : parsed.value * found->factor;
  if (!std::isfinite(parsed.value)) parsed.fault = QuantityFault::not_finite;
  if (is_counted(family) && parsed.value != std::floor(parsed.value)) parsed.fault = QuantityFault::not_whole;
  return parsed;
}

ParsedQuantity parse_number(std::string_view text) {
  std::string_view rest;
  ParsedQuantity parsed = leading_number(text, rest);
  if (parsed && !rest.empty()) {
    parsed.unit = plain_unit(rest);
    parsed.fault = QuantityFault::wrong_unit;
  }
  return parsed;
}

ParsedQuantity parse_whole(std::string_view text) {
  ParsedQuantity parsed = parse_number(text);
  if (parsed && (parsed.value != std::floor(parsed.value) || std::abs(parsed.value) > 9e15))
    parsed.fault = QuantityFault::not_whole;
  return parsed;
}

std::string format_number(double value, int digits) {
  if (value == 0.0) return "0";  // not "-0"
  return fmt::format("{:.{}g}", value, digits);
}

std::string format_quantity(double value, Family family, int digits) {
  if (is_counted(family))
    return format_number(value, 16) + " " + std::string(units_of(family)[value == 1.0 ? 0 : 1].name);
  if (family == Family::angle) return format_number(value * 180.0 / pi, digits) + " deg";
  // The largest unit in which the number is not below one; centimetres are left to those who write them.
  const std::vector<Unit>& units = units_of(family);
  const Unit* chosen = nullptr;
  const Unit* base = nullptr;
  for (const Unit& unit : units) {
    if (unit.name == "cm") continue;
    if (unit.factor == 1.0) base = &unit;
    if (chosen == nullptr || std::abs(value) >= unit.factor * (1.0 - 1e-9)) chosen = &unit;
  }
  if (value == 0.0) chosen = base;
  return fmt::format("{} {}", format_number(value / chosen->factor, digits), chosen->name);
}

}  // namespace wanewall
