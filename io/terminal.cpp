#include "io/terminal.hpp"

#include <fmt/format.h>
#include <signal.h>
#include <sys/ioctl.h>
#include <time.h>
#include <unistd.h>

#include <algorithm>
#include <array>
#include <atomic>
#include <cmath>
#include <cstdlib>

namespace wanewall {
namespace {

void write_all(int descriptor, std::string_view text) {
  while (!text.empty()) {
    const ssize_t n = ::write(descriptor, text.data(), text.size());
    if (n < 0 && errno == EINTR) continue;
    if (n <= 0) return;
    text.remove_prefix(static_cast<std::size_t>(n));
  }
}

constexpr std::array<int, 3> stop_signals{SIGINT, SIGTERM, SIGHUP};
std::array<struct sigaction, 3> previous_actions;
struct sigaction previous_pipe_action;

// Only lock-free atomics and functions that POSIX allows in a signal handler are used below.
std::atomic<bool> stop_wanted{false};
std::atomic<long long> first_signal_ms{0};
static_assert(std::atomic<bool>::is_always_lock_free && std::atomic<long long>::is_always_lock_free);

long long now_ms() {
  timespec now{};
  clock_gettime(CLOCK_MONOTONIC, &now);
  return static_cast<long long>(now.tv_sec) * 1000 + now.tv_nsec / 1000000;
}

// One key press may arrive twice: from the terminal and from a program that wraps this one.
constexpr long long one_press_ms = 300;

extern "C" void on_stop_signal(int signal_number) {
  const int kept_errno = errno;
  if (!stop_wanted.exchange(true)) {
    first_signal_ms.store(now_ms());
  } else if (signal_number == SIGINT && now_ms() - first_signal_ms.load() >= one_press_ms) {
    // The default action, so that a calling shell sees an interrupted program and stops its own loop.
    struct sigaction by_default {};
    by_default.sa_handler = SIG_DFL;
    sigaction(SIGINT, &by_default, nullptr);
    raise(SIGINT);
  }
  errno = kept_errno;
}

}  // namespace

void say(std::string_view text) {
  write_all(STDOUT_FILENO, text);
}
void warn(std::string_view text) {
  write_all(STDERR_FILENO, text);
}

std::string duration_text(double seconds) {
  if (!(seconds >= 0.0) || seconds > 1e9) return "an unknown time";
  if (seconds < 0.9995) return fmt::format("{:.0f} ms", seconds * 1e3);
  const long s = std::lround(seconds);
  if (s < 60) return fmt::format("{} s", s);
  if (s < 3600) return fmt::format("{} min {:02} s", s / 60, s % 60);
  if (s < 86400) return fmt::format("{} h {:02} min", s / 3600, s % 3600 / 60);
  return fmt::format("{} d {:02} h", s / 86400, s % 86400 / 3600);
}

std::string bytes_text(double bytes) {
  static constexpr std::array<const char*, 6> units{"B", "kB", "MB", "GB", "TB", "PB"};
  std::size_t unit = 0;
  while (bytes >= 999.5 && unit + 1 < units.size()) {
    bytes /= 1000.0;
    ++unit;
  }
  const int decimals = unit == 0 || bytes >= 99.95 ? 0 : bytes >= 9.995 ? 1 : 2;
  return fmt::format("{:.{}f} {}", bytes, decimals, units[unit]);
}

StopSignals::StopSignals() {
  stop_wanted.store(false);
  struct sigaction action {};
  action.sa_handler = on_stop_signal;
  action.sa_flags = SA_RESTART;
  sigemptyset(&action.sa_mask);
  for (std::size_t i = 0; i < stop_signals.size(); ++i) {
    sigaction(stop_signals[i], nullptr, &previous_actions[i]);
    if (previous_actions[i].sa_handler != SIG_IGN) sigaction(stop_signals[i], &action, nullptr);
  }
  struct sigaction ignore {};
  ignore.sa_handler = SIG_IGN;
  sigaction(SIGPIPE, &ignore, &previous_pipe_action);
}

StopSignals::~StopSignals() {
  for (std::size_t i = 0; i < stop_signals.size(); ++i)
    sigaction(stop_signals[i], &previous_actions[i], nullptr);
  sigaction(SIGPIPE, &previous_pipe_action, nullptr);
}

bool StopSignals::stop_is_wanted() {
  return stop_wanted.load();
}

ProgressStyle progress_style_of_output() {
  if (isatty(STDOUT_FILENO) == 0) return ProgressStyle::log_lines;
  const char* term = std::getenv("TERM");
  const bool can_rewrite = term != nullptr && *term != '\0' && std::string_view(term) != "dumb";
  return can_rewrite ? ProgressStyle::one_line : ProgressStyle::log_lines;
}

int terminal_columns() {
  winsize size{};
  if (ioctl(STDOUT_FILENO, TIOCGWINSZ, &size) == 0 && size.ws_col > 0) return size.ws_col;
  return 80;
}

std::string progress_text(const Progress& progress, bool ends_early) {
  const double done = progress.last_step > 0
                          ? static_cast<double>(progress.step) / static_cast<double>(progress.last_step)
                          : 1.0;
  const int percent = static_cast<int>(100.0 * done);  // rounded down: 100 % is said only when it is true
  std::string text = fmt::format("{:3} %  step {} of {}", percent, progress.step, progress.last_step);
  if (progress.cells_per_second > 0.0)
    text += fmt::format("  {:.3g} Gcell/s", progress.cells_per_second * 1e-9);
  if (std::isfinite(progress.energy_db)) text += fmt::format("  energy {:.1f} dB", progress.energy_db);
  if (progress.step >= progress.last_step) {
    text += fmt::format("  {}", duration_text(progress.seconds));
  } else if (progress.step > 0) {
    text += fmt::format("  {}{} left", ends_early ? "at most " : "",
                        duration_text(progress.seconds * (1.0 - done) / done));
  }
  return text;
}

ProgressMonitor::ProgressMonitor(ProgressStyle style, bool ends_early, int columns, Write write)
    : style_(style),
      ends_early_(ends_early),
      columns_(static_cast<std::size_t>(std::max(columns, 2))),
      write_(std::move(write)) {}

bool ProgressMonitor::go_on(const Progress& progress) {
  if (style_ == ProgressStyle::one_line && (shown_columns_ == 0 || progress.seconds - shown_at_s_ >= 0.2)) {
    // The last column stays free: many terminals go to the next line when it is filled.
    std::string text = progress_text(progress, ends_early_).substr(0, columns_ - 1);
    const std::size_t used = text.size();
    if (used < shown_columns_) text.append(shown_columns_ - used, ' ');
    write_("\r" + text);
    shown_columns_ = used;
    shown_at_s_ = progress.seconds;
  } else if (style_ == ProgressStyle::log_lines) {
    // A line for each tenth of the steps, and in a long run about one more for each tenth of the time so far:
    // a log of a whole night stays short, and its last line is never much out of date.
    const long tenths = progress.last_step > 0 ? 10 * progress.step / progress.last_step : 0;
    const double pause_s = std::max(10.0, 0.1 * progress.seconds);
    if (tenths > shown_tenths_ || progress.seconds - shown_at_s_ >= pause_s) {
      write_(progress_text(progress, ends_early_) + "\n");
      shown_tenths_ = tenths;
      shown_at_s_ = progress.seconds;
    }
  }
  return !StopSignals::stop_is_wanted();
}

void ProgressMonitor::close() {
  if (shown_columns_ > 0) write_("\n");
  shown_columns_ = 0;
}

}  // namespace wanewall
