// Checks a scene's tree against the declarations: keys, forms, units, ranges. What passes can be read without
// doubt.
#pragma once

#include <string>

#include "io/scene/declaration.hpp"
#include "io/scene/source.hpp"

namespace wanewall::scene {

/// Throws SceneError that tells all faults found (ten at most).
void check_form(const Node& root, const Block& block, const std::string& file);

/// True for a name of letters, digits, _ and -, of 1 to 64 characters.
bool is_name(const std::string& text);

}  // namespace wanewall::scene
