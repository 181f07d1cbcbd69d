// The blocks that make up a scene, each declared in a file of its own.
#pragma once

#include "io/scene/declaration.hpp"

namespace wanewall::scene {

const Block& medium_block();
const Block& object_block();
const Block& illumination_block();
const Block& shell_block();
const Block& record_block();

}  // namespace wanewall::scene
