// A small table and its text: Markdown for people, CSV for programs. Data in, text out.
#pragma once

#include <string>
#include <variant>
#include <vector>

namespace wanewall {

/// How a column's numbers look in Markdown. CSV holds every number with nine significant digits.
enum class NumberStyle {
  one_decimal,  ///< -31.4
  four_digits,  ///< 1.234e-17, 0.25
  whole,        ///< 12
};

struct Column {
  std::string name;
  std::string unit;  ///< empty: none
  NumberStyle style = NumberStyle::four_digits;
};

/// Nothing, a text, or a number. A number that is not finite counts as nothing.
using Cell = std::variant<std::monostate, std::string, double>;

struct Table {
  std::vector<Column> columns;
  std::vector<std::vector<Cell>> rows;  ///< each with as many cells as there are columns
};

/// A pipe table with aligned columns: texts to the left, numbers to the right, "-" for nothing. The header
/// reads "name [unit]".
std::string to_markdown(const Table& table);

/// RFC 4180 with a header line, but lines end in a bare line feed. Nothing is an empty cell. The point is the
/// decimal sign whatever the locale.
std::string to_csv(const Table& table);

}  // namespace wanewall
