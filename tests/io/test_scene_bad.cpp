// Scenes that are wrong. Each file in bad_scenes starts with what must be said of it:
//   # line 12                 the line of the first complaint
//   # says <text>             a part of the message; what is allowed is always among them
#include <catch2/catch.hpp>

#include <algorithm>
#include <filesystem>
#include <fstream>
#include <iterator>
#include <sstream>
#include <string>
#include <vector>

#include "io/errors.hpp"
#include "io/scene.hpp"

namespace {

namespace fs = std::filesystem;

struct Expected {
  int line = 0;
  std::vector<std::string> says;
};

std::vector<fs::path> bad_scenes() {
  std::vector<fs::path> list;
  for (const auto& entry : fs::directory_iterator(fs::path(WANEWALL_SOURCE_DIR) / "tests/io/bad_scenes"))
    if (entry.path().extension() == ".yaml") list.push_back(entry.path());
  std::sort(list.begin(), list.end());
  return list;
}

Expected expected_of(const fs::path& path) {
  std::ifstream in(path, std::ios::binary);
  Expected expected;
  for (std::string line; std::getline(in, line);) {
    if (line.starts_with("# line "))
      expected.line = std::stoi(line.substr(7));
    else if (line.starts_with("# says "))
      expected.says.push_back(line.substr(7));
    else
      break;
  }
  return expected;
}

}  // namespace

TEST_CASE("Each bad scene is refused with its file, line, what is wrong and what is allowed") {
  const std::vector<fs::path> scenes = bad_scenes();
  REQUIRE(scenes.size() >= 100);
  for (const fs::path& path : scenes) {
    const Expected expected = expected_of(path);
    INFO(path.filename().string());
    REQUIRE(expected.line > 0);
    REQUIRE_FALSE(expected.says.empty());
    std::string text;
    try {
      wanewall::read_scene(path.string());
    } catch (const wanewall::SceneError& error) {
      text = error.what();
    }
    INFO("message: " << text);
    CHECK(text.starts_with(path.string() + ":" + std::to_string(expected.line) + ":"));
    CHECK(text.find("\n  allowed: ") != std::string::npos);
    CHECK(text.find("\n  next: ") != std::string::npos);
    for (const std::string& part : expected.says) {
      INFO("looking for: " << part);
      CHECK(text.find(part) != std::string::npos);
    }
  }
}
