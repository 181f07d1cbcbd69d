// Good scenes, mutilated in many ways that are the same on every run: whatever happens, the reader gives a
// scene or says SceneError or FileError with a place and what is allowed, and does so at once.
#include <algorithm>
#include <array>
#include <catch2/catch.hpp>
#include <cmath>
#include <filesystem>
#include <fstream>
#include <iterator>
#include <random>
#include <string>
#include <vector>

#include "io/errors.hpp"
#include "io/scene.hpp"

using namespace wanewall;
namespace fs = std::filesystem;

namespace {

const std::string folder = std::string(WANEWALL_SOURCE_DIR) + "/tests/io/good_scenes";

std::vector<std::string> good_texts() {
  std::vector<fs::path> paths;
  for (const auto& entry : fs::directory_iterator(folder))
    if (entry.path().extension() == ".yaml") paths.push_back(entry.path());
  std::sort(paths.begin(), paths.end());
  std::vector<std::string> texts;
  for (const fs::path& path : paths) {
    std::ifstream in(path, std::ios::binary);
    texts.emplace_back(std::istreambuf_iterator<char>(in), std::istreambuf_iterator<char>());
  }
  return texts;
}

struct Tally {
  int good = 0, refused = 0;
};

/// A scene that was let through must hold finite, sensible numbers.
void check_sane(const Scene& scene) {
  CHECK(scene.band_lo_hz > 0.0);
  CHECK(scene.band_hi_hz > scene.band_lo_hz);
  CHECK(std::isfinite(scene.problem.lattice.dt_s));
  CHECK(scene.problem.lattice.courant_number() <= 1.0 + 1e-12);
  CHECK(scene.problem.lattice.n_cells() <= 4e9);
  CHECK(scene.problem.last_step() >= 1);
  CHECK_FALSE(scene.used.empty());
}

void feed(const std::string& text, Tally& tally) {
  std::string complaint;
  try {
    check_sane(parse_scene(text, "fuzz.yaml", folder));
    ++tally.good;
    return;
  } catch (const SceneError& error) {
    complaint = error.what();
    if (complaint.find("\n  allowed: ") == std::string::npos || complaint.find(':') == std::string::npos)
      FAIL_CHECK("incomplete message: " << complaint);
  } catch (const FileError& error) {
    complaint = error.what();
  } catch (const std::exception& error) {
    FAIL_CHECK("threw something else: " << error.what() << "\non\n" << text);
  }
  ++tally.refused;
}

}  // namespace

TEST_CASE("Scenes cut short anywhere are refused or read, never more") {
  Tally tally;
  for (const std::string& text : good_texts())
    for (std::size_t end = 0; end < text.size(); end += text.size() / 60 + 1)
      feed(text.substr(0, end), tally);
  CHECK(tally.refused > 300);
}

TEST_CASE("Scenes with lines missing, repeated, swapped or pushed in are refused or read, never more") {
  Tally tally;
  for (const std::string& text : good_texts()) {
    std::vector<std::string> lines(1);
    for (const char c : text) {
      lines.back() += c;
      if (c == '\n') lines.emplace_back();
    }
    const auto joined = [](const std::vector<std::string>& all) {
      std::string whole;
      for (const std::string& line : all) whole += line;
      return whole;
    };
    for (std::size_t n = 0; n < lines.size(); ++n) {
      std::vector<std::string> changed = lines;
      changed.erase(changed.begin() + static_cast<std::ptrdiff_t>(n));
      feed(joined(changed), tally);
      changed = lines;
      changed.insert(changed.begin() + static_cast<std::ptrdiff_t>(n), lines[n]);
      feed(joined(changed), tally);
      changed = lines;
      std::swap(changed[n], changed[(n + 1) % lines.size()]);
      feed(joined(changed), tally);
      changed = lines;
      changed[n] = "  " + changed[n];
      feed(joined(changed), tally);
    }
  }
  CHECK(tally.good > 50);
  CHECK(tally.refused > 200);
}

TEST_CASE("Scenes with bytes and values replaced are refused or read, never more") {
  const std::array<std::string, 26> bytes{
      "\t", "\n", "\r", " ", "{", "}",  "[", "]", ",", ":", "-", "#", "&",
      "*",  "!",  "|",  ">", "'", "\"", "%", "@", "`", "~", "?", "9", std::string(1, '\0')};
  const std::array<std::string, 22> values{"nan",      "-1",
                                           "0",        "1e999",
                                           "1e-300 m", "1e300 m",
                                           "-5 mm",    "inf s",
                                           "yes",      "null",
                                           "~",        "[]",
                                           "{}",       "[[[]]]",
                                           "&a x",     "*a",
                                           "!!set",    "\xff\xfe",
                                           "\xc3\x28", "0 m",
                                           "1 um",     "99999999999999999999"};
  std::minstd_rand random(20240229);
  Tally tally;
  for (const std::string& text : good_texts()) {
    for (int n = 0; n < 120; ++n) {
      std::string changed = text;
      const std::size_t at = random() % changed.size();
      changed.replace(at, random() % 3, bytes[random() % bytes.size()]);
      feed(changed, tally);
    }
    // A value ends at a comma, a bracket or the end of its line.
    for (int n = 0; n < 120; ++n) {
      std::string changed = text;
      const std::size_t colon = changed.find(": ", random() % changed.size());
      if (colon == std::string::npos) continue;
      const std::size_t end = std::min(changed.find_first_of(",]}\n", colon), changed.size());
      changed.replace(colon + 2, end - colon - 2, values[random() % values.size()]);
      feed(changed, tally);
    }
  }
  CHECK(tally.good > 80);
  CHECK(tally.refused > 500);
}

TEST_CASE("Hostile texts are refused at once") {
  Tally tally;
  feed(std::string(100000, '['), tally);
  feed(std::string(100000, '{'), tally);
  feed(std::string(5000, '-') + " x", tally);
  std::string deep;
  for (int n = 0; n < 2000; ++n) deep += std::string(static_cast<std::size_t>(n), ' ') + "a:\n";
  feed(deep.substr(0, 1 << 20), tally);
  std::string wide;
  for (int n = 0; n < 60000; ++n) wide += "k" + std::to_string(n) + ": 1\n";
  feed(wide, tally);
  std::string points = "record: {points: {";
  for (int n = 0; n < 20000; ++n) points += "p" + std::to_string(n) + ": [0 m, 0 m, 0 m], ";
  feed(points + "}}\n", tally);
  feed(std::string(2 << 20, 'a'), tally);
  feed("a: \"" + std::string(1 << 19, 'a') + "\"\n", tally);
  feed("? " + std::string(1 << 19, 'a') + "\n", tally);
  feed(std::string("\xef\xbb\xbf"), tally);
  feed("--- \n--- \n--- \n", tally);
  feed("%YAML 9.9\n---\nband: x\n", tally);
  feed("%TAG ! tag:x,2000:\n---\nband: !x x\n", tally);
  feed("band: [1 GHz, 2 GHz\n# never closed", tally);
  feed("title: |\n  text\n title: x", tally);
  CHECK(tally.good == 0);
}
