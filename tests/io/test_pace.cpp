// What is remembered of a machine's pace from run to run.
#include <catch2/catch.hpp>
#include <cstdlib>
#include <filesystem>
#include <fstream>

#include "io/pace.hpp"
#include "io/scene.hpp"
#include "tests/io/record_fixture.hpp"

using namespace wanewall;
using namespace wanewall::test;

namespace {

class CacheFolder {
 public:
  explicit CacheFolder(const std::string& path) {
    if (const char* before = std::getenv("XDG_CACHE_HOME")) before_ = before;
    setenv("XDG_CACHE_HOME", path.c_str(), 1);
  }
  ~CacheFolder() {
    before_.empty() ? unsetenv("XDG_CACHE_HOME") : setenv("XDG_CACHE_HOME", before_.c_str(), 1);
  }

 private:
  std::string before_;
};

Problem small(int cells) {
  const std::string half = std::to_string(cells / 2);
  return parse_scene("band: [1 GHz, 2 GHz]\nclear_volume: {x: [-" + half + " cm, " + half +
                         " cm], y: [-10 cm, 10 cm], "
                         "z: [-10 cm, 10 cm]}\nmesh: {cell: 1 cm}\nstop: {at: 20 ns}\n"
                         "illumination: {plane_wave: {from: {theta: 0 deg}}}\n",
                     "small.yaml", ".")
      .problem;
}

}  // namespace

TEST_CASE("A pace is remembered for scenes of the same shape and for no other") {
  const TemporaryFolder folder;
  const CacheFolder cache(folder / "");
  const Problem scene = small(20), other = small(22);
  CHECK_FALSE(known_pace(scene));
  remember_pace(scene, {{12, 20, 6}, 1.5e9});
  remember_pace(other, {{8, 9, 10}, 2.5e9});
  REQUIRE(known_pace(scene));
  CHECK(known_pace(scene)->tiles == TileShape{12, 20, 6});
  CHECK(known_pace(scene)->cells_per_second == 1.5e9);
  CHECK(known_pace(other)->tiles == TileShape{8, 9, 10});
  remember_pace(scene, {{4, 5, 7}, 3e9});
  CHECK(known_pace(scene)->tiles == TileShape{4, 5, 7});
  Problem twice = scene;
  twice.precision = Precision::double_precision;
  CHECK_FALSE(known_pace(twice));
  twice = scene;
  twice.threads = 7;
  CHECK_FALSE(known_pace(twice));
}

TEST_CASE("A cache that makes no sense is as good as none, and is written anew") {
  const TemporaryFolder folder;
  const CacheFolder cache(folder / "");
  const Problem scene = small(20);
  for (const std::string text : {"[1, 2", "just words", "{}", ""}) {
    std::filesystem::create_directories(folder / "wanewall");
    std::ofstream(pace_file()) << text;
    CAPTURE(text);
    CHECK_FALSE(known_pace(scene));
    remember_pace(scene, {{12, 20, 6}, 1.5e9});
    CHECK(known_pace(scene));
  }
  // Tiles that no schedule takes.
  remember_pace(scene, {{0, 20, 6}, 1.5e9});
  CHECK_FALSE(known_pace(scene));
  remember_pace(scene, {{5, 20, 1000}, 1.5e9});
  CHECK_FALSE(known_pace(scene));
}

TEST_CASE("A measured pace is that of the scene's own march") {
  const Pace pace = measure_pace(small(20), 0.2);
  CHECK(pace.cells_per_second > 1e5);
  CHECK(pace.cells_per_second < 1e12);
  CHECK(pace.tiles.steps >= 1);
  CHECK(pace.tiles.steps <= most_tile_steps);
}
