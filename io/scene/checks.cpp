#include "io/scene/checks.hpp"

namespace wanewall::scene {

void check_scene(Cursor&, Reading&, const Scene&) {}

}  // namespace wanewall::scene
