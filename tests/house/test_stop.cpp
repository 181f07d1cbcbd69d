// A run that is told to stop ends cleanly with a usable record and code 5.
#include <signal.h>

#include <catch2/catch.hpp>
#include <filesystem>

#include "io/record.hpp"
#include "tests/house/child_process.hpp"
#include "tests/house/small_scene.hpp"

using namespace wanewall;
using namespace wanewall::test;

TEST_CASE("Ctrl-C and a request to terminate keep what was computed") {
  const int signal_number = GENERATE(SIGINT, SIGTERM, SIGHUP);
  CAPTURE(signal_number);
  const ScratchFolder folder;
  folder.write("endless.yaml", small_scene(1e5));  // ten million steps
  Child child({"run", "endless.yaml"}, folder.path());
  REQUIRE(child.wait_for_line());  // the run has begun
  child.send(signal_number);
  const Outcome outcome = child.finish();
  CAPTURE(outcome.out, outcome.err);
  CHECK(outcome.signal == 0);
  CHECK(outcome.exit_code == 5);
  CHECK(outcome.err.find("stopped early") != std::string::npos);

  const Record record(folder.path() + "/endless.h5");
  CHECK(record.result.reason == StopReason::interrupted);
  CHECK(record.result.steps < 10000000);
  for (const SnapshotList& list : record.snapshots)
    for (std::size_t i = 0; i < list.steps.size(); ++i) CHECK(list.steps[i] <= record.result.steps);
  // Nothing half-written stays behind: scene, record, and the file that caught the messages.
  int files = 0;
  for ([[maybe_unused]] const auto& entry : std::filesystem::directory_iterator(folder.path())) ++files;
  CHECK(files == 3);
}

TEST_CASE("A run whose reader has gone goes on") {
  const ScratchFolder folder;
  folder.write("small.yaml", small_scene(4.0));
  const Outcome outcome = Child({"run", "small.yaml"}, folder.path()).finish_unread();
  CHECK(outcome.signal == 0);
  CHECK(outcome.exit_code == 0);
  CHECK(std::filesystem::exists(folder.path() + "/small.h5"));
}
