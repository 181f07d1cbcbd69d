// Pictures of curves: what gnuplot is told, and what happens when it is not there.
#include <catch2/catch.hpp>
#include <cstdlib>
#include <fstream>
#include <iterator>
#include <limits>

#include "io/errors.hpp"
#include "io/picture.hpp"
#include "tests/io/record_fixture.hpp"

using namespace wanewall;
using namespace wanewall::test;

namespace {

LineChart small_chart() {
  const double gap = std::numeric_limits<double>::quiet_NaN();
  LineChart chart;
  chart.title = "It's a test";
  chart.x_label = "time [ns]";
  chart.y_label = "error [dB]";
  chart.curves = {{"first_one", {0.0, 1.0, 2.0}, {-20.0, gap, -60.0}},
                  {"second", {0.0, 2.0}, {-40.0, -50.0}}};
  return chart;
}

/// Puts PATH back when a test leaves.
class OtherPath {
 public:
  explicit OtherPath(const char* path) : before_(std::getenv("PATH")) { setenv("PATH", path, 1); }
  ~OtherPath() { setenv("PATH", before_.c_str(), 1); }
  OtherPath(const OtherPath&) = delete;
  OtherPath& operator=(const OtherPath&) = delete;

 private:
  std::string before_;
};

}  // namespace

TEST_CASE("A chart's script holds its data, labels and apart colours and patterns", "[picture]") {
  const std::string script = gnuplot_script(small_chart());
  CHECK_THAT(script, Catch::Contains("'It''s a test'") && Catch::Contains("'time [ns]'") &&
                         Catch::Contains("'error [dB]'"));
  CHECK_THAT(script, Catch::Contains("0 -20\n1 NaN\n2 -60\n"));
  CHECK_THAT(script, Catch::Contains("'#0072B2' dashtype 1") && Catch::Contains("'#D55E00' dashtype '-'"));
}

TEST_CASE("A chart becomes an SVG file with its words in it", "[picture]") {
  const TemporaryFolder folder;
  draw_svg(small_chart(), folder / "chart.svg");
  std::ifstream in(folder / "chart.svg");
  const std::string svg{std::istreambuf_iterator<char>(in), {}};
  CHECK_THAT(svg, Catch::StartsWith("<?xml") && Catch::Contains("</svg>"));
  CHECK_THAT(svg, Catch::Contains("first_one") && Catch::Contains("error [dB]"));
  CHECK(folder.n_files() == 1);
}

TEST_CASE("Without gnuplot the message names the package, and nothing is left behind", "[picture]") {
  const TemporaryFolder folder;
  const OtherPath nothing_here("/nonexistent");
  CHECK_THROWS_AS(draw_svg(small_chart(), folder / "chart.svg"), FileError);
  CHECK_THROWS_WITH(draw_svg(small_chart(), folder / "chart.svg"),
                    Catch::Contains("gnuplot-nox") && Catch::Contains("chart.svg"));
  CHECK(folder.n_files() == 0);
}

TEST_CASE("A thinned curve keeps its peaks", "[picture]") {
  Curve curve{"c", {}, {}};
  for (int n = 0; n < 1000; ++n) {
    curve.x.push_back(n);
    curve.y.push_back(n == 777 ? 5.0 : -100.0);
  }
  const Curve fewer = thinned(curve, 10);
  REQUIRE(fewer.x.size() == 10);
  CHECK(fewer.x[7] == 777.0);
  CHECK(fewer.y[7] == 5.0);
  CHECK(thinned(curve, 1000).x.size() == 1000);
}
