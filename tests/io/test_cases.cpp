// Every scene that comes with the program can be read as it stands.
#include <catch2/catch.hpp>
#include <filesystem>

#include "io/scene.hpp"

using namespace wanewall;

TEST_CASE("Every scene in cases/ is read without an error or a warning", "[scene]") {
  int scenes = 0;
  for (const auto& entry : std::filesystem::recursive_directory_iterator(WANEWALL_SOURCE_DIR "/cases")) {
    if (entry.path().extension() != ".yaml") continue;
    ++scenes;
    CAPTURE(entry.path().string());
    Scene scene;
    REQUIRE_NOTHROW(scene = read_scene(entry.path().string()));
    for (const std::string& warning : scene.warnings) UNSCOPED_INFO(warning);
    CHECK(scene.warnings.empty());
  }
  CHECK(scenes >= 11);
}
