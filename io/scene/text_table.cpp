#include "io/scene/text_table.hpp"

#include <algorithm>

namespace wanewall::scene {
namespace {

/// Characters of a UTF-8 text.
std::size_t length_of(const std::string& text) {
  return static_cast<std::size_t>(std::count_if(
      text.begin(), text.end(), [](char c) { return (static_cast<unsigned char>(c) & 0xc0U) != 0x80U; }));
}

std::string laid_out(const std::vector<std::vector<std::string>>& rows, int indent, bool numbers_right) {
  std::vector<std::size_t> width;
  for (const auto& row : rows) {
    width.resize(std::max(width.size(), row.size()), 0);
    for (std::size_t c = 0; c < row.size(); ++c) width[c] = std::max(width[c], length_of(row[c]));
  }
  std::string text;
  for (const auto& row : rows) {
    std::string line(static_cast<std::size_t>(indent), ' ');
    for (std::size_t c = 0; c < row.size(); ++c) {
      const std::string pad(width[c] - length_of(row[c]), ' ');
      if (c > 0) line += "  ";
      line += c > 0 && numbers_right ? pad + row[c] : row[c] + pad;
    }
    line.erase(line.find_last_not_of(' ') + 1);
    text += line + "\n";
  }
  return text;
}

}  // namespace

std::string aligned(const std::vector<std::vector<std::string>>& rows, int indent) {
  return laid_out(rows, indent, true);
}

std::string aligned_pairs(const std::vector<std::vector<std::string>>& rows, int indent) {
  return laid_out(rows, indent, false);
}

}  // namespace wanewall::scene
