#include "io/terminal.hpp"

#include <signal.h>
#include <sys/wait.h>
#include <time.h>
#include <unistd.h>

#include <catch2/catch.hpp>
#include <cmath>
#include <limits>
#include <string>
#include <vector>

using namespace wanewall;

namespace {

Progress at(long step, long last_step, double seconds) {
  Progress p;
  p.step = step;
  p.last_step = last_step;
  p.seconds = seconds;
  p.cells_per_second = 9.1e8;
  p.energy_db = -12.34;
  return p;
}

struct Kept {
  std::vector<std::string> pieces;
  ProgressMonitor::Write write() {
    return [this](std::string_view text) { pieces.emplace_back(text); };
  }
};

void sleep_ms(long ms) {
  const timespec pause{ms / 1000, ms % 1000 * 1000000};
  nanosleep(&pause, nullptr);
}

// Runs `body` in a child process and returns its wait status.
template <typename Body>
int status_of_child(Body body) {
  const pid_t pid = fork();
  if (pid == 0) {
    struct sigaction by_default {};
    by_default.sa_handler = SIG_DFL;
    for (const int s : {SIGINT, SIGTERM, SIGHUP}) sigaction(s, &by_default, nullptr);
    body();
  }
  int status = 0;
  waitpid(pid, &status, 0);
  return status;
}

}  // namespace

TEST_CASE("Durations are written for a person") {
  CHECK(duration_text(0.0) == "0 ms");
  CHECK(duration_text(0.9994) == "999 ms");
  CHECK(duration_text(0.9996) == "1 s");
  CHECK(duration_text(59.4) == "59 s");
  CHECK(duration_text(59.6) == "1 min 00 s");
  CHECK(duration_text(3599.7) == "1 h 00 min");
  CHECK(duration_text(7.0 * 3600.0 + 300.0) == "7 h 05 min");
  CHECK(duration_text(2.0 * 86400.0 + 3.5 * 3600.0) == "2 d 03 h");
  CHECK(duration_text(std::numeric_limits<double>::quiet_NaN()) == "an unknown time");
  CHECK(duration_text(std::numeric_limits<double>::infinity()) == "an unknown time");
}

TEST_CASE("Sizes are written with three digits in decimal units") {
  CHECK(bytes_text(0.0) == "0 B");
  CHECK(bytes_text(999.0) == "999 B");
  CHECK(bytes_text(1000.0) == "1.00 kB");
  CHECK(bytes_text(9996.0) == "10.0 kB");
  CHECK(bytes_text(999600.0) == "1.00 MB");
  CHECK(bytes_text(123.4e6) == "123 MB");
  CHECK(bytes_text(4.56e9) == "4.56 GB");
}

TEST_CASE("A line of progress says how far, how fast and how long") {
  CHECK(progress_text(at(50, 200, 10.0), false) ==
        " 25 %  step 50 of 200  0.91 Gcell/s  energy -12.3 dB  30 s left");
  CHECK(progress_text(at(50, 200, 10.0), true) ==
        " 25 %  step 50 of 200  0.91 Gcell/s  energy -12.3 dB  at most 30 s left");
  CHECK(progress_text(at(200, 200, 40.0), false) ==
        "100 %  step 200 of 200  0.91 Gcell/s  energy -12.3 dB  40 s");
  CHECK(progress_text(at(1999, 2000, 40.0), false).substr(0, 5) == " 99 %");
  // Before the first step there is no rate, no energy and no estimate.
  Progress start = at(0, 200, 0.0);
  start.cells_per_second = 0.0;
  start.energy_db = -std::numeric_limits<double>::infinity();
  CHECK(progress_text(start, false) == "  0 %  step 0 of 200");
}

TEST_CASE("On a terminal one line is rewritten, and never grows past the width") {
  Kept kept;
  ProgressMonitor monitor(ProgressStyle::one_line, false, 40, kept.write());
  CHECK(monitor.go_on(at(1, 1000, 1.0)));
  CHECK(monitor.go_on(at(2, 1000, 1.05)));  // too soon to be seen
  CHECK(monitor.go_on(at(500, 1000, 2.0)));
  monitor.close();
  monitor.close();
  REQUIRE(kept.pieces.size() == 3);
  for (std::size_t i = 0; i < 2; ++i) {
    CHECK(kept.pieces[i].front() == '\r');
    CHECK(kept.pieces[i].size() <= 40);  // the return and at most 39 columns
  }
  CHECK(kept.pieces[2] == "\n");
}

TEST_CASE("A shorter line covers the longer one before it") {
  Kept kept;
  ProgressMonitor monitor(ProgressStyle::one_line, false, 200, kept.write());
  monitor.go_on(at(1, 100000000, 1.0));
  monitor.go_on(at(100000000, 100000000, 9.0));
  REQUIRE(kept.pieces.size() == 2);
  CHECK(kept.pieces[1].size() >= kept.pieces[0].size());
}

TEST_CASE("Into a pipe go whole lines, a few for a whole night") {
  Kept kept;
  const long steps = 100000;
  const double night_s = 10.0 * 3600.0;
  {
    ProgressMonitor monitor(ProgressStyle::log_lines, false, 40, kept.write());
    for (long step = 1; step <= steps; ++step)
      monitor.go_on(at(step, steps, night_s * double(step) / double(steps)));
  }
  CHECK(kept.pieces.size() > 20);
  CHECK(kept.pieces.size() < 120);
  for (const std::string& piece : kept.pieces) {
    CHECK(piece.back() == '\n');
    CHECK(piece.find_first_of("\r\x1b") == std::string::npos);
  }
  CHECK(kept.pieces.back().substr(0, 5) == "100 %");
}

TEST_CASE("A quiet run shows nothing") {
  Kept kept;
  {
    ProgressMonitor monitor(ProgressStyle::none, false, 80, kept.write());
    CHECK(monitor.go_on(at(100, 100, 100.0)));
  }
  CHECK(kept.pieces.empty());
}

TEST_CASE("The first signal is a wish to stop, also when it comes twice") {
  const int status = status_of_child([] {
    const StopSignals signals;
    ProgressMonitor monitor(ProgressStyle::none, false, 80, [](std::string_view) {});
    if (!monitor.go_on(at(1, 2, 0.0))) _exit(1);
    raise(SIGTERM);
    raise(SIGTERM);  // as when a wrapping program signals the child and then its whole group
    sleep_ms(400);
    raise(SIGTERM);
    raise(SIGHUP);
    _exit(monitor.go_on(at(1, 2, 0.0)) ? 2 : 42);
  });
  REQUIRE(WIFEXITED(status));
  CHECK(WEXITSTATUS(status) == 42);
}

TEST_CASE("A second Ctrl-C ends the program at once") {
  const int status = status_of_child([] {
    const StopSignals signals;
    raise(SIGINT);
    sleep_ms(400);
    raise(SIGINT);
    _exit(1);
  });
  REQUIRE(WIFSIGNALED(status));
  CHECK(WTERMSIG(status) == SIGINT);
}

TEST_CASE("A signal ignored from outside stays ignored") {
  const int status = status_of_child([] {
    struct sigaction ignore {};
    ignore.sa_handler = SIG_IGN;
    sigaction(SIGHUP, &ignore, nullptr);  // as under nohup
    const StopSignals signals;
    raise(SIGHUP);
    _exit(StopSignals::stop_is_wanted() ? 1 : 42);
  });
  REQUIRE(WIFEXITED(status));
  CHECK(WEXITSTATUS(status) == 42);
}

TEST_CASE("Signals have their old meaning again afterwards") {
  const int status = status_of_child([] {
    { const StopSignals signals; }
    raise(SIGTERM);
    _exit(1);
  });
  REQUIRE(WIFSIGNALED(status));
  CHECK(WTERMSIG(status) == SIGTERM);
}
