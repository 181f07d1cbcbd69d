// wanewall tables, started as a user would, on records whose reflection is known.
#include <catch2/catch.hpp>
#include <filesystem>
#include <fstream>
#include <iterator>
#include <string>
#include <vector>

#include "io/errors.hpp"
#include "tests/house/child_process.hpp"
#include "tests/io/record_fixture.hpp"
#include "tests/postproc/lattice_fields.hpp"

using namespace wanewall;
using namespace wanewall::test;

namespace {

constexpr int code(ExitCode exit_code) {
  return static_cast<int>(exit_code);
}

enum class Holds { audit_and_points, points, nothing, planes_of_another_size };

/// A box whose z+ face returns -20 dB of a plane wave at normal incidence.
void write_record(const std::string& path, Holds holds) {
  TestFace face;
  face.periodic = {true, true};
  face.clear_cells = {12, 10};
  WaveSum wave = one_wave(face, 0.0, 0.0, 0.0, 1.0);
  wave.tm_in(0, 0) = 0.1;
  Scene scene = small_scene();
  scene.problem.lattice = face.lattice();
  scene.title = "Known\nreflection";
  for (Face& f : scene.problem.faces) f.kind = FaceKind::periodic;
  scene.problem.faces[4].kind = scene.problem.faces[5].kind = FaceKind::cfs_pml;
  RunResult result = small_result();
  result.audit = {};
  if (holds == Holds::audit_and_points) {
    result.audit.frequencies_hz = {face.frequency_hz};
    result.audit.faces = {audit_face(face, wave)};
  }
  if (holds == Holds::planes_of_another_size) {
    face.clear_cells[0] -= 1;
    result.audit.frequencies_hz = {face.frequency_hz};
    result.audit.faces = {audit_face(face, wave)};
  }
  if (holds == Holds::nothing) result.points.clear();
  RecordWriter writer(path, scene);
  writer.finish(result, small_provenance(), false);
}

struct Tables {
  ScratchFolder folder;
  std::string record = folder.path() + "/run.h5";
  explicit Tables(Holds holds = Holds::audit_and_points) { write_record(record, holds); }

  Outcome operator()(std::vector<std::string> arguments) const {
    arguments.insert(arguments.begin(), {"tables", record});
    return run_program(arguments, folder.path());
  }
  std::string file(const std::string& name) const {
    std::ifstream in(folder.path() + "/" + name);
    return {std::istreambuf_iterator<char>(in), {}};
  }
};

}  // namespace

TEST_CASE("tables prints where every figure comes from and reads a known reflection", "[tables]") {
  const Tables tables;
  const Outcome outcome = tables({});
  CAPTURE(outcome.err);
  REQUIRE(outcome.exit_code == code(ExitCode::done));
  CHECK(outcome.err.empty());
  CHECK_THAT(outcome.out, Catch::StartsWith("# Tables: Known reflection\n"));
  CHECK_THAT(outcome.out, Catch::Contains("band 400 MHz to 1.6 GHz") && Catch::Contains("Courant number") &&
                              Catch::Contains("computed by wanewall 0.1.0") &&
                              Catch::Contains("double precision") && Catch::Contains("margin of 6 dB") &&
                              Catch::Contains("plane waves over one period"));
  CHECK_THAT(outcome.out, Catch::Contains("## Face z+ (cfs_pml, 3 cells)") && Catch::Contains("| -20.0 "));
  CHECK_THAT(outcome.out, Catch::Contains("## Points") && Catch::Contains("above_drum"));
  std::string numbers = outcome.out;  // "infinite face" is a word, not a number
  for (std::size_t at; (at = numbers.find("infinite")) != std::string::npos;) numbers.erase(at, 8);
  CHECK_THAT(numbers, !Catch::Contains("nan") && !Catch::Contains("inf"));
}

TEST_CASE("tables writes its files whole, and the same Markdown as on the terminal", "[tables]") {
  const Tables tables;
  const Outcome outcome = tables({"--out", "night/first"});
  CAPTURE(outcome.err);
  REQUIRE(outcome.exit_code == code(ExitCode::done));
  CHECK(tables.file("night/first/tables.md") == outcome.out);
  CHECK_THAT(tables.file("night/first/reflection.csv"),
             Catch::StartsWith("face,frequency [Hz],polarisation,incidence from [deg]") &&
                 Catch::Contains("z+,2e+09,TM,0,10,"));
  CHECK_THAT(tables.file("night/first/power.csv"), Catch::Contains("net clear [W s^2]"));
  CHECK_THAT(tables.file("night/first/points.csv"), Catch::Contains("above_drum,0.01,-0.02,0.3,Ex,"));
  CHECK_THAT(tables.file("night/first/point_spectra.csv"), Catch::Contains("magnitude,unit,phase [deg]"));
  std::size_t n_files = 0;
  for ([[maybe_unused]] const auto& entry :
       std::filesystem::directory_iterator(tables.folder.path() + "/night/first"))
    ++n_files;
  CHECK(n_files == 5);
  // Again, over what is there.
  CHECK(tables({"--out", "night/first", "--csv-only"}).exit_code == code(ExitCode::done));
}

TEST_CASE("tables prints one CSV table into a pipe on request", "[tables]") {
  const Outcome outcome = Tables()({"--csv-only", "--face", "z+", "--frequency", "2 GHz"});
  REQUIRE(outcome.exit_code == code(ExitCode::done));
  CHECK_THAT(outcome.out, Catch::StartsWith("face,frequency [Hz],"));
  CHECK(std::count(outcome.out.begin(), outcome.out.end(), '\n') == 3);  // header, TE, TM
}

TEST_CASE("tables says what was audited when something else is asked for", "[tables]") {
  const Tables tables;
  const Outcome face = tables({"--face", "x-"});
  CHECK(face.exit_code == code(ExitCode::command_line));
  CHECK_THAT(face.err, Catch::Contains("--face x- was not audited") && Catch::Contains("allowed: z+"));
  const Outcome other = tables({"--frequency", "2.1 GHz"});
  CHECK(other.exit_code == code(ExitCode::command_line));
  CHECK_THAT(other.err, Catch::Contains("was not audited") && Catch::Contains("allowed: 2 GHz"));
  const Outcome bare = tables({"--frequency", "2e9"});
  CHECK(bare.exit_code == code(ExitCode::command_line));
  CHECK_THAT(bare.err, Catch::Contains("is not a frequency") && Catch::Contains("GHz"));
  CHECK(tables({"--face", "top"}).exit_code == code(ExitCode::command_line));
}

TEST_CASE("tables does with what a record holds", "[tables]") {
  const Outcome points = Tables(Holds::points)({});
  CHECK(points.exit_code == code(ExitCode::done));
  CHECK_THAT(points.out, Catch::Contains("holds no shell audit") && Catch::Contains("## Points"));
  const Tables empty(Holds::nothing);
  const Outcome nothing = empty({});
  CHECK(nothing.exit_code == code(ExitCode::done));
  CHECK_THAT(nothing.out, Catch::Contains("holds no shell audit") && Catch::Contains("No points"));
  const Outcome csv = empty({"--csv-only"});
  CHECK(csv.exit_code == code(ExitCode::done));
  CHECK(csv.out.empty());
  CHECK_THAT(csv.err, Catch::Contains("there is no table"));
}

TEST_CASE("tables refuses records that do not fit together and folders that cannot be", "[tables]") {
  const Outcome odd = Tables(Holds::planes_of_another_size)({});
  CHECK(odd.exit_code == code(ExitCode::file));
  CHECK(odd.out.empty());
  CHECK_THAT(odd.err, Catch::Contains("run.h5") && Catch::Contains("does not fit together") &&
                          Catch::Contains("11 x 11 values, the lattice has 12 x 11"));
  const Tables tables;
  const Outcome taken = tables({"--out", "run.h5"});
  CHECK(taken.exit_code == code(ExitCode::file));
  CHECK_THAT(taken.err, Catch::Contains("the folder cannot be made"));
}
