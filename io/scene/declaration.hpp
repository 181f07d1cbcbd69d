// What the scene language consists of, as data. The reader, the list of used values, the JSON Schema and the
// reference page all follow from these declarations; keys.cpp holds the declarations themselves.
#pragma once

#include <limits>
#include <string>
#include <string_view>
#include <vector>

#include "io/quantity.hpp"

namespace wanewall::scene {

/// Allowed values of a quantity or number, in base units.
struct Range {
  double lo = -std::numeric_limits<double>::infinity();
  double hi = std::numeric_limits<double>::infinity();
  bool lo_open = false, hi_open = false;
  bool contains(double value) const;
};

/// A key or word that a later version will know.
struct Later {
  std::string name;
  std::string instead;  ///< what to do today
};

struct Block;

/// What a value may look like.
struct Form {
  enum class Kind {
    quantity,  ///< number and unit: family, range
    number,    ///< plain number: range
    whole,     ///< whole number: range
    word,      ///< one of `words`
    text,      ///< free text of at most `most` characters
    name,      ///< a name: letters, digits, _ and -
    yes_no,    ///< true or false
    list,      ///< of `of[0]`, `least` to `most` entries
    block,     ///< keys of `block`
    named,     ///< names chosen by the user, each with a value `of[0]`
    either     ///< one of the forms in `of`, told apart by being a scalar, a list or a block
  };
  Kind kind = Kind::text;
  Family family = Family::length;
  Range range;
  std::vector<std::string> words;
  std::vector<Later> later;
  std::vector<Form> of;
  std::size_t least = 0, most = 0;
  const Block* block = nullptr;
};

struct Key {
  std::string name;
  Form form;
  bool required = false;
  std::string fallback;  ///< default in the scene's notation; empty when there is none
  std::string
      derived;  ///< in words, when the default follows from other keys or from the inheritance of faces
  std::string sentence;
};

struct Block {
  std::string title;
  std::string sentence;
  std::vector<Key> keys;
  std::vector<std::vector<std::string>> exactly_one_of;
  std::vector<std::vector<std::string>> at_most_one_of;
  std::vector<std::vector<std::string>> at_least_one_of;
  std::vector<Later> later;

  const Key* find(std::string_view name) const;
  std::vector<std::string> names() const;
};

/// The whole scene.
const Block& scene_block();

/// What a form allows, for messages and the reference page: "a length > 0 m (nm, um, mm, cm, m, km)".
std::string allowed_text(const Form& form);
/// Only the range: " > 0 m", " from 0 to 64"; empty when everything goes.
std::string range_text(const Form& form);

}  // namespace wanewall::scene
