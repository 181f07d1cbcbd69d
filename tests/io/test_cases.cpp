// Every scene that comes with the program can be read as it stands.
#include <catch2/catch.hpp>
#include <filesystem>

#include "io/scene.hpp"

using namespace wanewall;

TEST_CASE("Every scene in cases/ is read as it stands", "[scene]") {
  int scenes = 0;
  for (const auto& entry : std::filesystem::recursive_directory_iterator(WANEWALL_SOURCE_DIR "/cases")) {
    if (entry.path().extension() != ".yaml") continue;
    ++scenes;
    CAPTURE(entry.path().string());
    CHECK_NOTHROW(read_scene(entry.path().string()));
  }
  CHECK(scenes >= 11);
}
