// What a run says to a person or to a log, and how a person stops it.
#pragma once

#include <functional>
#include <string>
#include <string_view>

#include "solver/results.hpp"

namespace wanewall {

/// Writes text to standard output (say) or standard error (warn). A closed pipe or a full disk behind them is
/// not reported: a run must not end because nobody reads its progress.
void say(std::string_view text);
void warn(std::string_view text);

/// "850 ms", "42 s", "3 min 20 s", "7 h 05 min", "2 d 03 h".
std::string duration_text(double seconds);
/// "123 kB", "4.56 GB": decimal units, three digits.
std::string bytes_text(double bytes);

/// Makes the first Ctrl-C (SIGINT), SIGTERM or SIGHUP a wish to stop, for as long as the object lives; a
/// second Ctrl-C ends the program at once. A signal that the program was started to ignore stays ignored.
/// Also lets writes to a closed pipe fail instead of ending the program. One object at a time.
class StopSignals {
 public:
  StopSignals();
  ~StopSignals();
  StopSignals(const StopSignals&) = delete;
  StopSignals& operator=(const StopSignals&) = delete;

  static bool stop_is_wanted();
};

/// How progress is shown.
enum class ProgressStyle {
  none,
  one_line,   ///< one line, rewritten in place: a terminal
  log_lines,  ///< whole lines, rarely: a pipe or a file
};
/// Standard output's style: one_line on a terminal that can rewrite a line, log_lines elsewhere.
ProgressStyle progress_style_of_output();

/// Shows a run's progress and passes the user's wish to stop on to it.
class ProgressMonitor : public Monitor {
 public:
  using Write = std::function<void(std::string_view)>;

  /// `ends_early`: the run may end before its last step, so the time left is an upper bound.
  /// `columns`: width that one_line may fill.
  ProgressMonitor(ProgressStyle style, bool ends_early, int columns, Write write);
  ~ProgressMonitor() override { close(); }
  ProgressMonitor(const ProgressMonitor&) = delete;
  ProgressMonitor& operator=(const ProgressMonitor&) = delete;

  bool go_on(const Progress& progress) override;
  /// Ends the rewritten line, so that what follows starts on a line of its own.
  void close();

 private:
  ProgressStyle style_;
  bool ends_early_;
  std::size_t columns_;
  Write write_;
  std::size_t shown_columns_ = 0;
  double shown_at_s_ = 0.0;
  long shown_tenths_ = 0;
};

/// One line of progress, without an end of line:
///   " 42 %  step 1240 of 2950  0.91 Gcell/s  energy -12.3 dB  1 min 20 s left"
std::string progress_text(const Progress& progress, bool ends_early);

/// Columns of the terminal behind standard output; 80 when it does not say.
int terminal_columns();

}  // namespace wanewall
