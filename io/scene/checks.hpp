// Checks on a scene that has been read: what cannot work is an error, what is doubtful a warning.
#pragma once

#include "io/scene.hpp"
#include "io/scene/cursor.hpp"

namespace wanewall::scene {

void check_scene(Cursor& root, Reading& reading, const Scene& scene);

}  // namespace wanewall::scene
