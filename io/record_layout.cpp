#include "io/record_layout.hpp"

#include <fmt/format.h>

#include <map>
#include <stdexcept>
#include <utility>

#include "io/errors.hpp"

namespace wanewall::record_layout {
namespace {

constexpr std::array<std::pair<FaceKind, const char*>, 7> face_words{
    {{FaceKind::moebius, "moebius"},
     {FaceKind::one_way, "one_way"},
     {FaceKind::cfs_pml, "cfs_pml"},
     {FaceKind::matched_slab, "matched_slab"},
     {FaceKind::electric_wall, "electric_wall"},
     {FaceKind::magnetic_wall, "magnetic_wall"},
     {FaceKind::periodic, "periodic"}}};
constexpr std::array<std::pair<StopReason, const char*>, 4> stop_words{
    {{StopReason::reached_end, "reached_end"},
     {StopReason::energy_fell, "energy_fell"},
     {StopReason::interrupted, "interrupted"},
     {StopReason::not_finite, "not_finite"}}};
constexpr std::array<std::pair<Precision, const char*>, 2> precision_words{
    {{Precision::single_precision, "single"}, {Precision::double_precision, "double"}}};

template <class Table, class Value>
std::string word_in(const Table& table, Value value) {
  for (const auto& [candidate, word] : table)
    if (candidate == value) return word;
  throw std::logic_error("a value without a word in the record");
}

template <class Table>
auto value_in(const Table& table, const std::string& wanted) {
  for (const auto& [value, word] : table)
    if (wanted == word) return value;
  throw std::invalid_argument(fmt::format("unknown word \"{}\"", wanted));
}

template <class Value, std::size_t n>
Value named_value(const std::array<Value, n>& all, const std::string& wanted) {
  for (const Value value : all)
    if (wanted == name_of(value)) return value;
  throw std::invalid_argument(fmt::format("unknown word \"{}\"", wanted));
}

}  // namespace

void describe(hdf5::Dataset& dataset, const Dimension& dimension, const std::string& description) {
  dataset.set_number("unitSI", 1.0);
  dataset.set_numbers("unitDimension", {dimension.begin(), dimension.end()});
  dataset.set_text("description", description);
}

std::string sanitised(const std::string& name) {
  std::string result = name.empty() ? "_" : name;
  for (char& c : result) {
    const bool allowed =
        (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z') || (c >= '0' && c <= '9') || c == '_';
    if (!allowed) c = '_';
  }
  return result;
}

void refuse_collisions(const std::vector<std::string>& names, const std::string& what,
                       const std::string& path) {
  std::map<std::string, std::string> taken;
  for (const std::string& name : names) {
    const auto [entry, is_new] = taken.emplace(sanitised(name), name);
    if (!is_new)
      throw FileError(
          fmt::format("{}: the {} \"{}\" and \"{}\" would both be called \"{}\" in the record / names must "
                      "differ in letters, digits or underscores; rename one",
                      path, what, entry->second, name, entry->first));
  }
}

std::string mesh_record_of(const std::string& snapshot, Component c) {
  return sanitised(snapshot) + (is_electric(c) ? "_E" : "_H");
}

std::string member_of(Component c) {
  return std::string(1, "xyz"[index_of(axis_of(c))]);
}

std::string iteration_of(long step) {
  return std::to_string(step);
}

std::string word_of(FaceKind kind) {
  return word_in(face_words, kind);
}
std::string word_of(StopReason reason) {
  return word_in(stop_words, reason);
}
std::string word_of(Precision precision) {
  return word_in(precision_words, precision);
}
FaceKind face_kind_of(const std::string& word) {
  return value_in(face_words, word);
}
StopReason stop_reason_of(const std::string& word) {
  return value_in(stop_words, word);
}
Precision precision_of(const std::string& word) {
  return value_in(precision_words, word);
}
Component component_of(const std::string& word) {
  return named_value(all_components, word);
}
Side side_of_word(const std::string& word) {
  return named_value(all_sides, word);
}

}  // namespace wanewall::record_layout
