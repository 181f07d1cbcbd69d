// Every bad scene of tests/io/bad_scenes, given to the program as a user would.
#include <algorithm>
#include <catch2/catch.hpp>
#include <filesystem>
#include <fstream>
#include <string>

#include "tests/house/child_process.hpp"

namespace fs = std::filesystem;

TEST_CASE("The program refuses each bad scene with exit code 3 and says where on standard error") {
  const wanewall::test::ScratchFolder folder;
  int count = 0;
  for (const auto& entry : fs::directory_iterator(fs::path(WANEWALL_SOURCE_DIR) / "tests/io/bad_scenes")) {
    if (entry.path().extension() != ".yaml") continue;
    std::ifstream in(entry.path());
    std::string first;
    std::getline(in, first);
    REQUIRE(first.starts_with("# line "));
    CAPTURE(entry.path().filename().string());
    const std::string path = entry.path().string();
    const auto outcome = wanewall::test::run_program({"check", path}, folder.path());
    CHECK(outcome.exit_code == 3);
    CHECK(outcome.out.empty());
    CHECK(outcome.err.find(path + ":" + first.substr(7) + ":") != std::string::npos);
    CHECK(outcome.err.find("allowed: ") != std::string::npos);
    ++count;
  }
  CHECK(count >= 100);
}
