// What can go wrong at the doors, and the exit code of each.
#pragma once

#include <stdexcept>
#include <string>

namespace wanewall {

/// The program's exit codes; an interface, documented in README.md.
enum class ExitCode {
  done = 0,
  bug = 1,            ///< a fault of ours
  command_line = 2,   ///< the command line is wrong
  scene = 3,          ///< the scene is wrong
  file = 4,           ///< a file cannot be read or written
  stopped_early = 5,  ///< the run was stopped early
  not_finite = 6,     ///< the fields became non-finite
  goal_missed = 7     ///< a goal was missed, where the user asked for a verdict
};

/// The scene is wrong. what() is complete: "file:line:column: key = value is not allowed / allowed: ... /
/// next step".
struct SceneError : std::runtime_error {
  using std::runtime_error::runtime_error;
};

/// A file cannot be read or written. what() names the file, what was being done, and why it failed.
struct FileError : std::runtime_error {
  using std::runtime_error::runtime_error;
};

}  // namespace wanewall
