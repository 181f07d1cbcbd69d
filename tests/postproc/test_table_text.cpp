#include "postproc/table_text.hpp"

#include <catch2/catch.hpp>
#include <limits>

using namespace wanewall;

namespace {

Table sample() {
  Table table;
  table.columns = {{"face", ""},
                   {"R", "dB", NumberStyle::one_decimal},
                   {"power", "W s^2", NumberStyle::four_digits},
                   {"cells", "", NumberStyle::whole}};
  table.rows.push_back({std::string("z+"), -31.449, 1.23456789e-17, 12.0});
  table.rows.push_back({std::string("a|b"), -0.04, Cell{}, std::numeric_limits<double>::infinity()});
  return table;
}

}  // namespace

TEST_CASE("A table as Markdown: aligned, units in the header, a dash for nothing", "[table_text]") {
  CHECK(to_markdown(sample()) ==
        "| face | R [dB] | power [W s^2] | cells |\n"
        "| ---- | -----: | ------------: | ----: |\n"
        "| z+   |  -31.4 |     1.235e-17 |    12 |\n"
        "| a\\|b |    0.0 |             - |     - |\n");
}

TEST_CASE("A table as CSV follows RFC 4180 but for bare line feeds", "[table_text]") {
  Table table = sample();
  table.rows[0][0] = std::string("say \"z+\", twice");
  table.rows[1][0] = std::string("two\nlines");
  CHECK(to_csv(table) ==
        "face,R [dB],power [W s^2],cells\n"
        "\"say \"\"z+\"\", twice\",-31.449,1.23456789e-17,12\n"
        "\"two\nlines\",-0.04,,\n");
}

TEST_CASE("Columns with texts among their numbers align to the left", "[table_text]") {
  Table table;
  table.columns = {{"R", "dB", NumberStyle::one_decimal}};
  table.rows = {{-3.0}, {std::string("no reading")}, {std::string("h\xC3\xB6her")}};
  CHECK(to_markdown(table) ==
        "| R [dB]     |\n"
        "| ---------- |\n"
        "| -3.0       |\n"
        "| no reading |\n"
        "| h\xC3\xB6her      |\n");
}

TEST_CASE("A table without rows is a header", "[table_text]") {
  Table table = sample();
  table.rows.clear();
  CHECK(to_csv(table) == "face,R [dB],power [W s^2],cells\n");
  CHECK(to_markdown(table) ==
        "| face | R [dB] | power [W s^2] | cells |\n"
        "| ---: | -----: | ------------: | ----: |\n");
}
