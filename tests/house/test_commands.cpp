// The command line as an interface: help, exit codes, and what goes where. Exit codes are documented in
// README.md.
#include <catch2/catch.hpp>
#include <filesystem>
#include <fstream>
#include <iterator>
#include <string>
#include <vector>

#include "io/record.hpp"
#include "tests/house/child_process.hpp"
#include "tests/house/small_scene.hpp"

using namespace wanewall;
using namespace wanewall::test;

namespace {

bool has(const std::string& text, const std::string& piece) {
  return text.find(piece) != std::string::npos;
}

const std::vector<std::string> commands{"check", "run", "tables", "probe", "compare", "shell", "speed"};

}  // namespace

TEST_CASE("Help and version are answers, not errors") {
  const ScratchFolder folder;
  const Outcome help = run_program({"--help"}, folder.path());
  CHECK(help.exit_code == 0);
  CHECK(help.err.empty());
  for (const std::string& command : commands) CHECK(has(help.out, "wanewall " + command));

  const Outcome version = run_program({"--version"}, folder.path());
  CHECK(version.exit_code == 0);
  CHECK(has(version.out, "wanewall " WANEWALL_VERSION));
}

TEST_CASE("Every command's help has an example") {
  const ScratchFolder folder;
  for (const std::string& command : commands) {
    CAPTURE(command);
    const Outcome help = run_program({command, "--help"}, folder.path());
    CHECK(help.exit_code == 0);
    CHECK(help.err.empty());
    CHECK(has(help.out, "Example"));
    CHECK(has(help.out, "\n  wanewall " + command + " "));
  }
}

TEST_CASE("Output that is lost is an error") {
  const ScratchFolder folder;
  folder.write("small.yaml", small_scene(4.0));
  const std::vector<std::string> words = GENERATE(std::vector<std::string>{"check", "--schema"},
                                                  std::vector<std::string>{"check", "--reference"},
                                                  std::vector<std::string>{"check", "small.yaml"});
  CAPTURE(words);
  const Outcome outcome = Child(words, folder.path(), "/dev/full").finish();
  CHECK(outcome.exit_code == 4);
  CHECK(has(outcome.err, "standard output"));
}

TEST_CASE("A wrong command line ends with code 2 and points to the help") {
  const ScratchFolder folder;
  const std::string scene = folder.write("small.yaml", small_scene(40.0));
  const std::vector<std::string> words =
      GENERATE(std::vector<std::string>{}, std::vector<std::string>{"rnu"}, std::vector<std::string>{"run"},
               std::vector<std::string>{"run", "small.yaml", "--sideways"},
               std::vector<std::string>{"run", "small.yaml", "other.yaml"},
               std::vector<std::string>{"run", "small.yaml", "--threads", "0"},
               std::vector<std::string>{"run", "small.yaml", "--threads", "two"},
               std::vector<std::string>{"run", "small.yaml", "--schedule", "sideways"},
               std::vector<std::string>{"run", "small.yaml", "--record"}, std::vector<std::string>{"check"},
               std::vector<std::string>{"tables"}, std::vector<std::string>{"probe"},
               std::vector<std::string>{"shell"}, std::vector<std::string>{"shell", "predict"});
  CAPTURE(words);
  const Outcome outcome = run_program(words, folder.path());
  CHECK(outcome.exit_code == 2);
  CHECK(outcome.out.empty());
  CHECK(has(outcome.err, "--help"));
  CHECK(!std::filesystem::exists(folder.path() + "/small.h5"));
}

TEST_CASE("A command that does not exist is named beside those that do") {
  const ScratchFolder folder;
  const Outcome outcome = run_program({"rnu", "small.yaml"}, folder.path());
  CHECK(has(outcome.err, "no command rnu"));
  for (const std::string& command : commands) CHECK(has(outcome.err, " " + command));
}

TEST_CASE("A wrong scene ends with code 3 and names file and line") {
  const ScratchFolder folder;
  folder.write("wrong.yaml", small_scene(40.0) + "no_such_key: 1\n");
  for (const std::string command : {"check", "run"}) {
    CAPTURE(command);
    const Outcome outcome = run_program({command, "wrong.yaml"}, folder.path());
    CHECK(outcome.exit_code == 3);
    CHECK(has(outcome.err, "wrong.yaml:"));
    CHECK(has(outcome.err, "no_such_key"));
    CHECK(!std::filesystem::exists(folder.path() + "/wrong.h5"));
  }
}

TEST_CASE("A file that cannot be read ends with code 4 and is named") {
  const ScratchFolder folder;
  folder.write("text.h5", "this is not a record\n");
  const std::vector<std::string> words = GENERATE(
      std::vector<std::string>{"check", "missing.yaml"}, std::vector<std::string>{"run", "missing.yaml"},
      std::vector<std::string>{"tables", "missing.h5"}, std::vector<std::string>{"tables", "text.h5"},
      std::vector<std::string>{"probe", "missing.h5", "--at", "0 m, 0 m, 0 m"});
  CAPTURE(words);
  const Outcome outcome = run_program(words, folder.path());
  CHECK(outcome.exit_code == 4);
  CHECK(has(outcome.err, words[1]));
}

TEST_CASE("A target that cannot be written is found before the run, with code 4") {
  const ScratchFolder folder;
  const std::string kept = "something that must not be lost";
  folder.write("endless.yaml", small_scene(1e6));  // the test would not end if the run began
  folder.write("taken.h5", kept);
  std::filesystem::create_directory(folder.path() + "/is_a_folder.h5");
  const std::string target = GENERATE("no_such_folder/x.h5", "taken.h5", "is_a_folder.h5", "endless.yaml");
  CAPTURE(target);
  const Outcome outcome = run_program({"run", "endless.yaml", "--record", target}, folder.path());
  CHECK(outcome.exit_code == 4);
  CHECK(has(outcome.err, target));
  CHECK(has(outcome.err, "next:"));
  CHECK(std::filesystem::file_size(folder.path() + "/taken.h5") == kept.size());
  CHECK(std::filesystem::exists(folder.path() + "/endless.yaml"));
}

TEST_CASE("Even with --force a run does not replace its own scene or a folder") {
  const ScratchFolder folder;
  folder.write("endless.yaml", small_scene(1e6));
  std::filesystem::create_directory(folder.path() + "/is_a_folder.h5");
  const std::string target = GENERATE("endless.yaml", "is_a_folder.h5");
  CAPTURE(target);
  const Outcome outcome = run_program({"run", "endless.yaml", "--record", target, "--force"}, folder.path());
  CHECK(outcome.exit_code == 4);
  CHECK(has(outcome.err, target));
  CHECK(std::filesystem::file_size(folder.path() + "/endless.yaml") == small_scene(1e6).size());
  CHECK(std::filesystem::is_directory(folder.path() + "/is_a_folder.h5"));
}

TEST_CASE("A run writes its record and says where") {
  const ScratchFolder folder;
  folder.write("small.yaml", small_scene(4.0));
  const Outcome outcome =
      run_program({"run", "small.yaml", "--threads", "1", "--schedule", "plain", "--xdmf"}, folder.path());
  CAPTURE(outcome.err);
  REQUIRE(outcome.exit_code == 0);
  CHECK(outcome.err.empty());
  CHECK(has(outcome.out, "wrote small.h5\n"));
  CHECK(has(outcome.out, "wrote small.h5.xdmf\n"));
  CHECK(has(outcome.out, "100 %"));
  // A pipe gets plain lines: no carriage return, no escape code.
  CHECK(outcome.out.find_first_of("\r\x1b") == std::string::npos);

  const Record record(folder.path() + "/small.h5");
  CHECK(record.result.reason == StopReason::reached_end);
  CHECK(record.provenance.threads == 1);
  CHECK(record.provenance.schedule == "plain");
  CHECK(record.provenance.program_version == WANEWALL_VERSION);
  CHECK(record.provenance.started_utc <= record.provenance.ended_utc);
  bool told = false;
  for (const UsedValue& used : record.used) told = told || (used.path == "run.threads" && used.value == "1");
  CHECK(told);

  // Again: not without --force, and with --force the new one takes the place.
  CHECK(run_program({"run", "small.yaml"}, folder.path()).exit_code == 4);
  const Outcome forced = run_program({"run", "small.yaml", "--force", "--quiet"}, folder.path());
  CHECK(forced.exit_code == 0);
  CHECK(forced.out.empty());
  CHECK(forced.err.empty());
  CHECK(Record(folder.path() + "/small.h5").provenance.schedule == "tiles");
}

TEST_CASE("On a terminal progress is one rewritten line") {
  const ScratchFolder folder;
  folder.write("small.yaml", small_scene(4.0));
  const Outcome outcome = Child({"run", "small.yaml"}, folder.path(), on_terminal).finish();
  REQUIRE(outcome.exit_code == 0);
  CHECK(has(outcome.out, "\r  "));
  CHECK(outcome.out.find('\x1b') == std::string::npos);
}

TEST_CASE("Fields that become non-finite end the run with code 6 and keep the record") {
  const ScratchFolder folder;
  // Just inside what single precision can hold, so that the first sums of two of them are not.
  folder.write("loud.yaml", small_scene(4.0, "3e38 V/m"));
  const Outcome outcome = run_program({"run", "loud.yaml"}, folder.path());
  CAPTURE(outcome.out);
  CHECK(outcome.exit_code == 6);
  CHECK(has(outcome.err, "non-finite"));
  const Record record(folder.path() + "/loud.h5");
  CHECK(record.result.reason == StopReason::not_finite);
  CHECK(!record.result.not_finite_where.empty());
  CHECK(has(outcome.err, record.result.not_finite_where));
}

TEST_CASE("check --time marches and says how long the run will take") {
  const ScratchFolder folder;
  folder.write("small.yaml", small_scene(4.0));
  const Outcome before = run_program({"check", "small.yaml"}, folder.path());
  CHECK(has(before.out, "not known: no such scene has been run here yet"));
  const Outcome timed = run_program({"check", "small.yaml", "--time"}, folder.path());
  CHECK(timed.exit_code == 0);
  CHECK(has(timed.out, "Gcell/s, measured just now"));
}

TEST_CASE("Tiles by hand are used, told, and refused when they make no sense") {
  const ScratchFolder folder;
  folder.write("small.yaml", small_scene(4.0));
  const Outcome run = run_program({"run", "small.yaml", "--tiles", "9", "7", "5", "--no-pin"}, folder.path());
  CHECK(run.exit_code == 0);
  CHECK(has(run.out, "tiles of 9 x 7 rows and 5 steps"));
  const Outcome many =
      run_program({"run", "small.yaml", "--force", "--tiles", "9", "7", "33"}, folder.path());
  CHECK(many.exit_code == 2);
  CHECK(has(many.err, "at most 32"));
  CHECK(run_program({"run", "small.yaml", "--force", "--tiles", "0", "7", "3"}, folder.path()).exit_code ==
        2);
}

TEST_CASE("speed checks before it prints, and writes figures for machines") {
  const ScratchFolder folder;
  const Outcome speed = run_program(
      {"speed", "--cells", "48", "--steps", "2", "--rounds", "1", "--more", "--json", "rates.json"},
      folder.path());
  CHECK(speed.exit_code == 0);
  CHECK(has(speed.out, "tiles of the full scene bit for bit"));
  for (const std::string row :
       {"| copy ", "| textbook loop ", "| bare cube, fused sweep ", "| bare cube, tiles ",
        "| full scene, tiles ", "double over single precision"})
    CHECK(has(speed.out, row));
  std::ifstream file(folder.path() + "/rates.json");
  const std::string figures{std::istreambuf_iterator<char>(file), {}};
  REQUIRE_FALSE(figures.empty());
  CHECK(figures.front() == '[');
  CHECK(has(figures, "\"id\": \"textbook\""));
  CHECK(has(figures, "\"cells\": 48"));
}
