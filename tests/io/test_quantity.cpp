// Quantities with their units. Prefixes and units follow the SI (BIPM, The International System of Units, 9th
// ed., 2019, tables 4 and 7; the factors from memory).
#include <catch2/catch.hpp>

#include <cmath>
#include <string>

#include "geometry/constants.hpp"
#include "io/quantity.hpp"

using namespace wanewall;

TEST_CASE("A quantity is a number and a unit of its family") {
  const struct {
    const char* text;
    Family family;
    double value;
  } cases[] = {
      {"6 mm", Family::length, 0.006},
      {"6mm", Family::length, 0.006},
      {"  -0.8   m ", Family::length, -0.8},
      {"+3 cm", Family::length, 0.03},
      {"1 nm", Family::length, 1e-9},
      {"2 km", Family::length, 2000.0},
      {"0.4 GHz", Family::frequency, 4e8},
      {"1 THz", Family::frequency, 1e12},
      {".5 kHz", Family::frequency, 500.0},
      {"1e-3 MHz", Family::frequency, 1000.0},
      {"60 ns", Family::time, 6e-8},
      {"1 fs", Family::time, 1e-15},
      {"30 deg", Family::angle, pi / 6.0},
      {"2 mrad", Family::angle, 0.002},
      {"-60 dB", Family::level, -60.0},
      {"10 uS/m", Family::conductivity, 1e-5},
      {"10 \u00b5S/m", Family::conductivity, 1e-5},
      {"10 \u03bcS/m", Family::conductivity, 1e-5},
      {"3 MS/m", Family::conductivity, 3e6},
      {"3 mS/m", Family::conductivity, 3e-3},
      {"2 kohm/m", Family::magnetic_conductivity, 2000.0},
      {"1 V/m", Family::electric_field, 1.0},
      {"1 A m", Family::current_moment, 1.0},
      {"1 mA  m", Family::current_moment, 1e-3},
      {"5 uV m", Family::voltage_moment, 5e-6},
      {"20 steps", Family::steps, 20.0},
      {"1 step", Family::steps, 1.0},
      {"6 cells", Family::cells, 6.0},
  };
  for (const auto& c : cases) {
    INFO(c.text);
    const ParsedQuantity parsed = parse_quantity(c.text, c.family);
    CHECK(parsed.fault == QuantityFault::none);
    CHECK(std::abs(parsed.value - c.value) <= 2e-16 * std::abs(c.value));
  }
}

TEST_CASE("A decimal length is the double nearest to it in metres") {
  // 1 mm = 1/1000 m exactly, so n mm is the quotient n / 1000, correctly rounded.
  for (int n = 1; n <= 1000; ++n) {
    INFO(n);
    CHECK(parse_quantity(std::to_string(n) + " mm", Family::length).value == n / 1000.0);
    CHECK(parse_quantity(std::to_string(n) + " ns", Family::time).value == n / 1e9);
  }
}

TEST_CASE("What is not a quantity is told apart") {
  const struct {
    const char* text;
    Family family;
    QuantityFault fault;
  } cases[] = {
      {"", Family::length, QuantityFault::empty},
      {"   ", Family::length, QuantityFault::empty},
      {"10", Family::length, QuantityFault::no_unit},
      {"1e3", Family::frequency, QuantityFault::no_unit},
      {"10 GHz", Family::length, QuantityFault::wrong_unit},
      {"10 MM", Family::length, QuantityFault::wrong_unit},
      {"10 mm mm", Family::length, QuantityFault::wrong_unit},
      {"10 m m", Family::length, QuantityFault::wrong_unit},
      {"1 Am", Family::current_moment, QuantityFault::wrong_unit},
      {"1,5 m", Family::length, QuantityFault::wrong_unit},
      {"1.5.2 m", Family::length, QuantityFault::wrong_unit},
      {"0x10 m", Family::length, QuantityFault::wrong_unit},
      {"m", Family::length, QuantityFault::not_a_number},
      {"- 3 m", Family::length, QuantityFault::not_a_number},
      {"+-3 m", Family::length, QuantityFault::not_a_number},
      {"++3 m", Family::length, QuantityFault::not_a_number},
      {"--3 m", Family::length, QuantityFault::not_a_number},
      {"one m", Family::length, QuantityFault::not_a_number},
      {".", Family::length, QuantityFault::not_a_number},
      {"nan m", Family::length, QuantityFault::not_finite},
      {"NaN m", Family::length, QuantityFault::not_finite},
      {"inf m", Family::length, QuantityFault::not_finite},
      {"-infinity m", Family::length, QuantityFault::not_finite},
      {"1e999 m", Family::length, QuantityFault::not_finite},
      {"1e306 THz", Family::frequency, QuantityFault::not_finite},
      {"2.5 steps", Family::steps, QuantityFault::not_whole},
  };
  for (const auto& c : cases) {
    INFO("'" << c.text << "'");
    CHECK(parse_quantity(c.text, c.family).fault == c.fault);
  }
}

TEST_CASE("Plain and whole numbers take no unit and no junk") {
  CHECK(parse_number("0.99").value == 0.99);
  CHECK(parse_number("-1e-3").value == -1e-3);
  CHECK(parse_number("4x").fault == QuantityFault::wrong_unit);
  CHECK(parse_number("4 mm").unit == "mm");
  CHECK(parse_number("nan").fault == QuantityFault::not_finite);
  CHECK(parse_number("").fault == QuantityFault::empty);
  CHECK(parse_whole("12").value == 12.0);
  CHECK(parse_whole("1e3").value == 1000.0);
  CHECK(parse_whole("3.5").fault == QuantityFault::not_whole);
  CHECK(parse_whole("1e300").fault == QuantityFault::not_whole);
  CHECK(parse_whole("8 cells").fault == QuantityFault::wrong_unit);
}

TEST_CASE("Every unit of every family is read, and no unit belongs to two families with different sizes") {
  int count = 0;
  for (const Family family : all_families()) {
    CHECK_FALSE(name_of(family).empty());
    for (const Unit& unit : units_of(family)) {
      INFO(unit.name);
      const ParsedQuantity parsed = parse_quantity("3 " + std::string(unit.name), family);
      CHECK(parsed.fault == QuantityFault::none);
      CHECK(parsed.value == Approx(3.0 * unit.factor).epsilon(1e-15));
      CHECK(unit_list(family).find(unit.name) != std::string::npos);
      ++count;
    }
    CHECK(parse_quantity("3 " + std::string(usual_unit(family)), family).fault == QuantityFault::none);
  }
  CHECK(count > 40);
}

TEST_CASE("A written quantity reads back as itself") {
  for (const Family family : all_families()) {
    if (is_counted(family)) continue;
    for (const double value :
         {1e-13, 3.7e-9, 0.001, 0.01, 0.9999999, 1.0, 47.11, 999.9, 1e3, 2.5e9, -0.25, 0.0}) {
      const std::string text = format_quantity(value, family, 15);
      INFO(name_of(family) << ": " << text);
      const ParsedQuantity parsed = parse_quantity(text, family);
      CHECK(parsed.fault == QuantityFault::none);
      CHECK(std::abs(parsed.value - value) <= 1e-14 * std::abs(value));
    }
  }
  CHECK(format_quantity(0.01, Family::length) == "10 mm");
  CHECK(format_quantity(1.0, Family::length) == "1 m");
  CHECK(format_quantity(-0.25, Family::length) == "-250 mm");
  CHECK(format_quantity(0.0, Family::time) == "0 s");
  CHECK(format_quantity(1.6e9, Family::frequency) == "1.6 GHz");
  CHECK(format_quantity(pi / 2, Family::angle) == "90 deg");
  CHECK(format_quantity(-80.0, Family::level) == "-80 dB");
  CHECK(format_quantity(1.0, Family::steps) == "1 step");
  CHECK(format_quantity(250.0, Family::cells) == "250 cells");
}
