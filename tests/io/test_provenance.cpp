#include "io/provenance.hpp"

#include <catch2/catch.hpp>
#include <ctime>
#include <regex>

using namespace wanewall;

TEST_CASE("The time is UTC in the form that openPMD 1.1.0 asks for") {
  // openPMD 1.1.0, attribute `date`: "YYYY-MM-DD HH:mm:ss tz".
  const std::time_t before = std::time(nullptr);
  const std::string text = utc_now();
  const std::time_t after = std::time(nullptr);
  REQUIRE(std::regex_match(text, std::regex(R"(\d{4}-\d\d-\d\d \d\d:\d\d:\d\d \+0000)")));
  std::tm parts{};
  REQUIRE(strptime(text.c_str(), "%Y-%m-%d %H:%M:%S", &parts) != nullptr);
  const std::time_t told = timegm(&parts);
  CHECK(told >= before);
  CHECK(told <= after);
}

TEST_CASE("A record can say where it comes from") {
  const Provenance p = provenance_of_program();
  CHECK(std::regex_match(p.program_version, std::regex(R"(\d+\.\d+\.\d+)")));
  CHECK(p.build_type.find_first_not_of(' ') != std::string::npos);
  CHECK(std::regex_search(p.compiler, std::regex(R"((GCC|[Cc]lang).*\d+\.\d+)")));
  CHECK(std::regex_search(p.processor, std::regex(R"(.+, [1-9]\d* hardware threads$)")));
  CHECK(p.host_system.rfind("Linux ", 0) == 0);
  CHECK(version_text().find(p.program_version) != std::string::npos);
}
