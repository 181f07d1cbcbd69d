#include "io/scene/complaint.hpp"

#include <fmt/format.h>

#include <algorithm>

#include "io/errors.hpp"

namespace wanewall::scene {
namespace {

constexpr std::size_t most_complaints = 10;

/// Optimal string alignment distance: insertions, deletions, changes, swaps of neighbours.
std::size_t edit_distance(std::string_view a, std::string_view b) {
  std::vector<std::size_t> two_back, last(b.size() + 1), row(b.size() + 1);
  for (std::size_t j = 0; j <= b.size(); ++j) last[j] = j;
  for (std::size_t i = 1; i <= a.size(); ++i) {
    row[0] = i;
    for (std::size_t j = 1; j <= b.size(); ++j) {
      const std::size_t change = last[j - 1] + (a[i - 1] == b[j - 1] ? 0 : 1);
      row[j] = std::min({last[j] + 1, row[j - 1] + 1, change});
      if (i > 1 && j > 1 && a[i - 1] == b[j - 2] && a[i - 2] == b[j - 1])
        row[j] = std::min(row[j], two_back[j - 2] + 1);
    }
    two_back = last;
    last = row;
  }
  return last[b.size()];
}

}  // namespace

std::string text_of(const std::string& file, const Complaint& complaint) {
  std::string text = shown(file);
  if (complaint.place.line > 0) text += fmt::format(":{}:{}", complaint.place.line, complaint.place.column);
  text += ": " + complaint.wrong + "\n  allowed: " + complaint.allowed;
  if (!complaint.next.empty()) text += "\n  next: " + complaint.next;
  return text;
}

void reject(const std::string& file, const Complaint& complaint) {
  throw SceneError(text_of(file, complaint));
}

void reject(const std::string& file, std::vector<Complaint> complaints) {
  std::stable_sort(complaints.begin(), complaints.end(), [](const Complaint& a, const Complaint& b) {
    return a.place.line != b.place.line ? a.place.line < b.place.line : a.place.column < b.place.column;
  });
  std::string text;
  for (std::size_t i = 0; i < complaints.size() && i < most_complaints; ++i)
    text += (i == 0 ? "" : "\n") + text_of(file, complaints[i]);
  if (complaints.size() > most_complaints)
    text += fmt::format("\nand {} more", complaints.size() - most_complaints);
  throw SceneError(text);
}

std::string nearest(std::string_view word, const std::vector<std::string>& candidates) {
  if (word.size() > 64) return {};
  std::string best;
  std::size_t best_distance = (word.size() + 2) / 3 + 1;
  for (const std::string& candidate : candidates) {
    const std::size_t distance = edit_distance(word, candidate);
    if (distance < best_distance) {
      best_distance = distance;
      best = candidate;
    }
  }
  return best;
}

std::string joined(const std::vector<std::string>& words) {
  return fmt::format("{}", fmt::join(words, ", "));
}

}  // namespace wanewall::scene
