// Rows of words in aligned columns.
#pragma once

#include <string>
#include <vector>

namespace wanewall::scene {

/// The first column to the left, the others to the right, two blanks between them and `indent` blanks in
/// front.
std::string aligned(const std::vector<std::vector<std::string>>& rows, int indent = 2);

/// Both columns to the left.
std::string aligned_pairs(const std::vector<std::vector<std::string>>& rows, int indent = 2);

}  // namespace wanewall::scene
