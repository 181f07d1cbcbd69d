// Short words for writing declarations.
#pragma once

#include <string>
#include <vector>

#include "geometry/constants.hpp"
#include "io/scene/declaration.hpp"

namespace wanewall::scene {

inline constexpr double no_end = std::numeric_limits<double>::infinity();
inline constexpr double degree = pi / 180.0;

Form quantity(Family family, Range range = {});
Form above_zero(Family family);
Form not_negative(Family family);
Form number(Range range);
Form whole(double lo, double hi);
Form words(std::vector<std::string> list, std::vector<Later> later = {});
Form text();
Form name();
Form yes_no();
Form list_of(Form entry, std::size_t least, std::size_t most);
Form block(const Block& of);
Form named(Form entry);
Form either(Form first, Form second);
Key required(std::string key_name, Form form, std::string sentence);
Key optional(std::string key_name, Form form, std::string sentence);
Key with_default(std::string key_name, Form form, std::string fallback, std::string sentence);
Key derived(std::string key_name, Form form, std::string rule, std::string sentence);
Form position();
Form length_range();
Form fields();
Form face_names();

}  // namespace wanewall::scene
