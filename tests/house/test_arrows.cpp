// The dependency rule of the house: geometry <- solver <- postproc <- io, and only io knows files, terminal
// and YAML.
#include <algorithm>
#include <array>
#include <catch2/catch.hpp>
#include <filesystem>
#include <fstream>
#include <iterator>
#include <regex>
#include <string>
#include <vector>

namespace fs = std::filesystem;

namespace {

const std::array<std::string, 4> rooms{"geometry", "solver", "postproc", "io"};

int rank_of(const std::string& room) {
  return static_cast<int>(std::find(rooms.begin(), rooms.end(), room) - rooms.begin());
}

std::string without_comments(const std::string& text) {
  static const std::regex comment(R"(//[^\n]*|/\*[^*]*\*+(?:[^/*][^*]*\*+)*/)");
  return std::regex_replace(text, comment, "");
}

// What one source file of a room does against the rule; empty when it keeps it.
std::vector<std::string> offences(const std::string& room, const std::string& text) {
  static const std::regex include_line(R"re((?:^|\n)\s*#\s*include\s*(["<])([^">]+)[">])re");
  static const std::regex outside_header(
      R"(fstream|iostream|ostream|istream|iosfwd|sstream|print|cstdio|stdio\.h|filesystem|csignal|signal\.h|unistd\.h|fcntl\.h|sys/(file|ioctl|socket|stat|uio|wait)\.h|yaml-cpp/.*|hdf5.*|H5.*|CLI/.*|fmt/(os|ostream|color)\.h)");
  static const std::regex outside_call(
      R"(std::(cout|cerr|clog|cin|FILE)\b|\b(f|v|vf)?printf\s*\(|\b(fopen|fputs|puts|fwrite|getenv)\s*\(|fmt::(v?print|println|output_file)\s*\()");
  std::vector<std::string> found;
  const std::string code = without_comments(text);
  for (std::sregex_iterator it(code.begin(), code.end(), include_line), end; it != end; ++it) {
    const std::string target = (*it)[2];
    if ((*it)[1] == "\"") {
      const std::string target_room = target.substr(0, target.find('/'));
      if (rank_of(target_room) == static_cast<int>(rooms.size()))
        found.push_back("includes \"" + target + "\" by a path that does not start with a room");
      else if (rank_of(target_room) > rank_of(room))
        found.push_back("includes upward: " + target);
    } else if (room != "io" && std::regex_match(target, outside_header)) {
      found.push_back("includes <" + target + ">, which only io may");
    }
  }
  if (room != "io") {
    for (std::sregex_iterator it(code.begin(), code.end(), outside_call), end; it != end; ++it)
      found.push_back("calls " + it->str() + ", which only io may");
  }
  return found;
}

std::string read_file(const fs::path& path) {
  std::ifstream in(path, std::ios::binary);
  return {std::istreambuf_iterator<char>(in), {}};
}

bool is_source(const fs::path& path) {
  const std::string e = path.extension().string();
  return e == ".hpp" || e == ".cpp" || e == ".inl" || e == ".h";
}

}  // namespace

TEST_CASE("No source file breaks the dependency rule") {
  int files = 0;
  for (const std::string& room : rooms) {
    for (const auto& entry : fs::recursive_directory_iterator(fs::path(WANEWALL_SOURCE_DIR) / room)) {
      if (!entry.is_regular_file() || !is_source(entry.path())) continue;
      ++files;
      for (const std::string& offence : offences(room, read_file(entry.path())))
        FAIL_CHECK(entry.path().lexically_relative(WANEWALL_SOURCE_DIR).string() << ": " << offence);
    }
  }
  CHECK(files > 20);  // the scan looked at the real house
}

TEST_CASE("The dependency check sees what it is there for") {
  CHECK(offences("geometry", "#include \"solver/problem.hpp\"\n").size() == 1);
  CHECK(offences("solver", "#include <vector>\n#  include \"postproc/x.hpp\"\n").size() == 1);
  CHECK(offences("postproc", "#include \"io/record.hpp\"\n").size() == 1);
  CHECK(offences("solver", "#include \"../io/record.hpp\"\n").size() == 1);
  CHECK(offences("solver", "#include \"fields.hpp\"\n").size() == 1);
  CHECK(offences("solver", "#include <fstream>\n").size() == 1);
  CHECK(offences("geometry", "#include <yaml-cpp/yaml.h>\n").size() == 1);
  CHECK(offences("postproc", "#include <hdf5.h>\nvoid f() { std::cout << 1; }\n").size() == 2);
  CHECK(offences("postproc", "void f() { fmt::print(\"{}\", 1); std::printf(\"x\"); }\n").size() == 2);
}

TEST_CASE("The dependency check leaves honest code alone") {
  CHECK(offences("io", "#include <fstream>\n#include <iostream>\n#include \"solver/problem.hpp\"\n").empty());
  CHECK(offences("solver", "#include \"geometry/lattice.hpp\"\n#include \"solver/shell/layer_table.hpp\"\n")
            .empty());
  CHECK(offences("postproc",
                 "// std::cout is for io\n/* #include \"io/x.hpp\" */\nauto s = fmt::format(\"{}\", 1);\n")
            .empty());
}

TEST_CASE("The top level holds the frame and nothing else") {
  const std::vector<std::string> allowed{"CMakeLists.txt", "DEVELOPERS.md", "LICENSE", "README.md",
                                         "cases",          "geometry",      "io",      "postproc",
                                         "solver",         "tests"};
  std::vector<std::string> found;
  for (const auto& entry : fs::directory_iterator(WANEWALL_SOURCE_DIR)) {
    const std::string name = entry.path().filename().string();
    // Dot-files, and what .gitignore keeps out of the house.
    if (name.starts_with(".") || name.starts_with("build") || name.starts_with("_") || name.ends_with(".deb"))
      continue;
    found.push_back(name);
  }
  std::sort(found.begin(), found.end());
  CHECK(found == allowed);
}
