#include "postproc/table_text.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

namespace wanewall {
namespace {

std::string header_of(const Column& column) {
  return column.unit.empty() ? column.name : column.name + " [" + column.unit + "]";
}

std::string number_text(double value, NumberStyle style) {
  switch (style) {
    case NumberStyle::one_decimal: {
      const std::string text = fmt::format("{:.1f}", value);
      return text == "-0.0" ? "0.0" : text;
    }
    case NumberStyle::whole:
      return fmt::format("{:.0f}", value);
    case NumberStyle::four_digits:
      break;
  }
  return fmt::format("{:.4g}", value);
}

// A bar would end the cell and a line end the row.
std::string markdown_safe(const std::string& text) {
  std::string safe;
  for (char c : text) {
    if (c == '|') safe += '\\';
    safe += c == '\n' || c == '\r' ? ' ' : c;
  }
  return safe;
}

std::string markdown_cell(const Cell& cell, const Column& column) {
  if (const auto* text = std::get_if<std::string>(&cell)) return markdown_safe(*text);
  const auto* value = std::get_if<double>(&cell);
  return value != nullptr && std::isfinite(*value) ? number_text(*value, column.style) : "-";
}

std::string csv_quoted(const std::string& text) {
  if (text.find_first_of(",\"\n\r") == std::string::npos) return text;
  std::string quoted = "\"";
  for (char c : text) {
    if (c == '"') quoted += '"';
    quoted += c;
  }
  return quoted + "\"";
}

std::string csv_cell(const Cell& cell) {
  if (const auto* text = std::get_if<std::string>(&cell)) return csv_quoted(*text);
  const auto* value = std::get_if<double>(&cell);
  return value != nullptr && std::isfinite(*value) ? fmt::format("{:.9g}", *value) : "";
}

// Columns of a terminal that a UTF-8 text fills, for the texts in use: one per character.
std::size_t width_of(const std::string& text) {
  return static_cast<std::size_t>(std::count_if(
      text.begin(), text.end(), [](char c) { return (static_cast<unsigned char>(c) & 0xC0) != 0x80; }));
}

std::string padded(const std::string& text, std::size_t width, bool to_right) {
  const std::string blanks(width - std::min(width, width_of(text)), ' ');
  return to_right ? blanks + text : text + blanks;
}

}  // namespace

std::string to_markdown(const Table& table) {
  const std::size_t n = table.columns.size();
  std::vector<std::vector<std::string>> texts{{}};
  std::vector<bool> is_number(n, true);
  for (const Column& column : table.columns) texts[0].push_back(markdown_safe(header_of(column)));
  for (const auto& row : table.rows) {
    texts.emplace_back();
    for (std::size_t i = 0; i < n; ++i) {
      texts.back().push_back(markdown_cell(row.at(i), table.columns[i]));
      if (std::holds_alternative<std::string>(row[i])) is_number[i] = false;
    }
  }
  std::vector<std::size_t> width(n, 3);
  for (const auto& row : texts)
    for (std::size_t i = 0; i < n; ++i) width[i] = std::max(width[i], width_of(row[i]));

  std::string out;
  for (std::size_t r = 0; r < texts.size(); ++r) {
    for (std::size_t i = 0; i < n; ++i) out += "| " + padded(texts[r][i], width[i], is_number[i]) + " ";
    out += "|\n";
    if (r > 0) continue;
    for (std::size_t i = 0; i < n; ++i)
      out += is_number[i] ? "| " + std::string(width[i] - 1, '-') + ": "
                          : "| " + std::string(width[i], '-') + " ";
    out += "|\n";
  }
  return out;
}

std::string to_csv(const Table& table) {
  std::string out;
  for (std::size_t i = 0; i < table.columns.size(); ++i) {
    if (i > 0) out += ',';
    out += csv_quoted(header_of(table.columns[i]));
  }
  out += '\n';
  for (const auto& row : table.rows) {
    for (std::size_t i = 0; i < table.columns.size(); ++i) {
      if (i > 0) out += ',';
      out += csv_cell(row.at(i));
    }
    out += '\n';
  }
  return out;
}

}  // namespace wanewall
