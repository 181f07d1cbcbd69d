// How the scene reader complains: where, what, what is allowed, what to do next.
#pragma once

#include <string>
#include <string_view>
#include <vector>

#include "io/scene/source.hpp"

namespace wanewall::scene {

struct Complaint {
  Place place;
  std::string wrong;    ///< "mesh.cell = 10 is not allowed", ...
  std::string allowed;  ///< "a length: a number with nm, um, ..."
  std::string next;     ///< what to do; may be empty
};

/// "file:line:column: wrong", then "  allowed: ..." and "  next: ..." on lines of their own.
std::string text_of(const std::string& file, const Complaint& complaint);

/// Throws SceneError with one complaint or with several, in the order of the file.
[[noreturn]] void reject(const std::string& file, const Complaint& complaint);
[[noreturn]] void reject(const std::string& file, std::vector<Complaint> complaints);

/// The candidate nearest to a word (edit distance with swaps of neighbours); empty when none is near.
std::string nearest(std::string_view word, const std::vector<std::string>& candidates);

/// "a, b, c"
std::string joined(const std::vector<std::string>& words);

}  // namespace wanewall::scene
