// wanewall probe, started as a user would, on records whose fields are known.
#include <catch2/catch.hpp>
#include <fstream>
#include <iterator>
#include <sstream>
#include <string>
#include <vector>

#include "io/errors.hpp"
#include "tests/house/child_process.hpp"
#include "tests/io/record_fixture.hpp"

using namespace wanewall;
using namespace wanewall::test;

namespace {

constexpr int code(ExitCode exit_code) {
  return static_cast<int>(exit_code);
}

struct Probed {
  ScratchFolder folder;
  std::string record = folder.path() + "/run.h5";
  Probed() { write_small_record(record); }

  Outcome operator()(std::vector<std::string> arguments) const {
    arguments.insert(arguments.begin(), {"probe", record});
    return run_program(arguments, folder.path());
  }
  std::string file(const std::string& name) const {
    std::ifstream in(folder.path() + "/" + name);
    return {std::istreambuf_iterator<char>(in), {}};
  }
};

std::vector<std::vector<std::string>> rows_of(const std::string& csv) {
  std::vector<std::vector<std::string>> rows;
  std::istringstream lines(csv);
  for (std::string line, cell; std::getline(lines, line);) {
    rows.emplace_back();
    std::istringstream cells(line);
    while (std::getline(cells, cell, ',')) rows.back().push_back(cell);
  }
  return rows;
}

/// The fixture's field: 100 i + 10 j + k + step / 1000, with i, j, k counted along the component's own
/// points.
double fixture_field(Component c, const Vec3& p_m, long step) {
  const auto points_m = lattice_points(small_lattice(), c, 2);
  double value = static_cast<double>(step) / 1000.0;
  const double factor[] = {100.0, 10.0, 1.0};
  for (std::size_t a = 0; a < 3; ++a)
    value += factor[a] * (p_m[a] - points_m[a][0]) / (points_m[a][1] - points_m[a][0]);
  return value;
}

}  // namespace

TEST_CASE("probe gives the field at a point, in Markdown and CSV", "[probe]") {
  const Probed probe;
  const std::string interpolation = GENERATE("linear", "cubic");
  const Outcome outcome =
      probe({"--at", "12 mm, 17.5 cm 3.1cm", "--csv", "field.csv", "--interpolation", interpolation});
  CAPTURE(outcome.err);
  REQUIRE(outcome.exit_code == code(ExitCode::done));
  CHECK_THAT(outcome.out, Catch::Contains("Field at x = 12 mm, y = 175 mm, z = 31 mm") &&
                              Catch::Contains("snapshot \"volume\"") && Catch::Contains("Nyquist limit") &&
                              Catch::Contains(interpolation) && Catch::Contains("[V/m]") &&
                              Catch::Contains("a sample every 340 ps (20 steps)") &&
                              Catch::Contains("CAUTION") && Catch::Contains("computed by wanewall 0.1.0"));
  const auto rows = rows_of(probe.file("field.csv"));
  REQUIRE(rows.size() == 3);
  CHECK(rows[0] == std::vector<std::string>{"step", "time of E [ns]", "Ex [V/m]", "Ey [V/m]", "Ez [V/m]",
                                            "time of H [ns]", "Hx [A/m]", "Hy [A/m]", "Hz [A/m]"});
  for (std::size_t n = 1; n < 3; ++n) {
    const int step = 20 * static_cast<int>(n);
    CHECK(rows[n][0] == std::to_string(step));
    CHECK(std::stod(rows[n][1]) == Approx(step * 0.017).epsilon(1e-8));
    CHECK(std::stod(rows[n][5]) == Approx((step + 0.5) * 0.017).epsilon(1e-8));
    for (const Component c : all_components) {
      CAPTURE(name_of(c));
      const auto column = static_cast<std::size_t>(is_electric(c) ? 2 + index_of(c) : 3 + index_of(c));
      CHECK(std::stod(rows[n][column]) ==
            Approx(fixture_field(c, {0.012, 0.175, 0.031}, step)).epsilon(1e-8));
    }
  }
}

TEST_CASE("probe gives spectra below the Nyquist limit and refuses others", "[probe]") {
  const Probed probe;
  const Outcome outcome =
      probe({"--at", "12 mm, 17.5 cm, 3.1 cm", "--frequencies", "0 Hz, 1 GHz", "--csv", "field.csv"});
  CAPTURE(outcome.err);
  REQUIRE(outcome.exit_code == code(ExitCode::done));
  CHECK_THAT(outcome.out,
             Catch::Contains("## Spectrum") && Catch::Contains("[V s/m]") && Catch::Contains("[A s/m]"));
  const auto rows = rows_of(probe.file("field.csv"));
  REQUIRE(rows.size() == 3);
  const Vec3 p_m{0.012, 0.175, 0.031};
  // At 0 Hz: the time between samples times their sum.
  CHECK(std::stod(rows[1][1]) ==
        Approx(20 * 1.7e-11 * (fixture_field(Component::ex, p_m, 20) + fixture_field(Component::ex, p_m, 40)))
            .epsilon(1e-8));
  const Outcome refused = probe({"--at", "12 mm, 17.5 cm, 3.1 cm", "--frequencies", "1 GHz", "1.48 GHz"});
  CHECK(refused.exit_code == code(ExitCode::command_line));
  CHECK_THAT(refused.err, Catch::Contains("1.48 GHz") && Catch::Contains("Nyquist limit 1.47059 GHz"));
  CHECK(probe({"--at", "12 mm, 17.5 cm, 3.1 cm", "--frequencies", "1"}).exit_code ==
        code(ExitCode::command_line));
}

TEST_CASE("probe takes the snapshot that is asked for", "[probe]") {
  const Probed probe;
  const Outcome plane = probe({"--at", "12 mm, 13 cm, 3.1 cm", "--snapshot", "plane y"});
  REQUIRE(plane.exit_code == code(ExitCode::done));
  CHECK_THAT(plane.out, Catch::Contains("snapshot \"plane y\"") && Catch::Contains("on the plane"));
  CHECK_THAT(plane.out, !Catch::Contains("Hx"));
  const Outcome unknown = probe({"--at", "12 mm, 13 cm, 3.1 cm", "--snapshot", "plane z"});
  CHECK(unknown.exit_code == code(ExitCode::command_line));
  CHECK_THAT(unknown.err, Catch::Contains("allowed: plane y, volume"));
}

TEST_CASE("probe names the boxes when a point lies outside", "[probe]") {
  const Probed probe;
  const Outcome outcome = probe({"--at", "-90 mm, 13 cm, 3.1 cm"});
  CHECK(outcome.exit_code == code(ExitCode::command_line));
  CHECK(outcome.out.empty());
  CHECK_THAT(outcome.err, Catch::Contains("lies in no snapshot") && Catch::Contains("plane y: x = ") &&
                              Catch::Contains("y = 130 mm") && Catch::Contains("volume: x = "));
}

TEST_CASE("probe lists what can be probed", "[probe]") {
  const Probed probe;
  const Outcome outcome = probe({"--list"});
  REQUIRE(outcome.exit_code == code(ExitCode::done));
  CHECK_THAT(outcome.out, Catch::Contains("plane y") && Catch::Contains("Ex Ey Ez Hx Hy Hz") &&
                              Catch::Contains("above_drum") && Catch::Contains("z last first"));
}

TEST_CASE("probe gives a recorded point", "[probe]") {
  const Probed probe;
  REQUIRE(probe({"--point", "above_drum", "--csv", "point.csv"}).exit_code == code(ExitCode::done));
  const auto rows = rows_of(probe.file("point.csv"));
  REQUIRE(rows.size() == 1 + 7);
  const auto values = small_result().points[1].values;
  for (std::size_t n = 0; n < 7; ++n) {
    CHECK(std::stod(rows[n + 1][4]) == Approx(values[2][n]).epsilon(1e-8));  // Ez
    CHECK(std::stod(rows[n + 1][8]) == Approx(values[5][n]).epsilon(1e-8));  // Hz
    CHECK(std::stod(rows[n + 1][5]) == Approx((static_cast<double>(n) + 0.5) * 0.017).epsilon(1e-8));
  }
  const Outcome unknown = probe({"--point", "nowhere"});
  CHECK(unknown.exit_code == code(ExitCode::command_line));
  CHECK_THAT(unknown.err, Catch::Contains("allowed: z last first, above_drum"));
}

TEST_CASE("probe refuses a wrong command line with 2 and a wrong file with 4", "[probe]") {
  const Probed probe;
  const std::vector<std::vector<std::string>> wrong{{},
                                                    {"--at", ""},
                                                    {"--at", "1 m, 2 m"},
                                                    {"--at", "1, 2, 3"},
                                                    {"--at", "1 m 2 m 3 GHz"},
                                                    {"--at", "nan m, 0 m, 0 m"},
                                                    {"--at", "x"},
                                                    {"--at", "0 m, 13 cm, 0 m", "--list"},
                                                    {"--at", "0 m, 13 cm, 0 m", "--point", "above_drum"},
                                                    {"--point", "above_drum", "--snapshot", "volume"},
                                                    {"--list", "--csv", "list.csv"},
                                                    {"--at", "0 m, 13 cm, 0 m", "--interpolation", "spline"}};
  for (const auto& arguments : wrong) {
    const Outcome outcome = probe(arguments);
    CAPTURE(arguments, outcome.err);
    CHECK(outcome.exit_code == code(ExitCode::command_line));
    CHECK_FALSE(outcome.err.empty());
  }
  const Outcome missing = run_program({"probe", "missing.h5", "--list"}, probe.folder.path());
  CHECK(missing.exit_code == code(ExitCode::file));
  CHECK_THAT(missing.err, Catch::Contains("missing.h5") && Catch::Contains("No such file"));
  probe.folder.write("text.h5", "no record\n");
  CHECK(run_program({"probe", "text.h5", "--list"}, probe.folder.path()).exit_code == code(ExitCode::file));
  CHECK(probe({"--point", "above_drum", "--csv", "missing/p.csv"}).exit_code == code(ExitCode::file));
}
