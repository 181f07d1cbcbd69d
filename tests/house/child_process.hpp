// Starts the built program as a user would and collects what it says.
#pragma once

#include <string>
#include <vector>

namespace wanewall::test {

struct Outcome {
  int exit_code = -1;  ///< -1 when a signal ended the program
  int signal = 0;
  std::string out, err;
};

/// Where a child's standard output goes; anything else is the path of a device.
inline const std::string into_pipe = "pipe", on_terminal = "terminal";

/// A running child. Its standard error goes to a file; its standard output to a pipe or a pseudo terminal.
class Child {
 public:
  /// Runs the program with these arguments in `folder`. Output to a device by its path cannot be read back.
  Child(const std::vector<std::string>& arguments, const std::string& folder,
        const std::string& output = into_pipe);
  ~Child();
  Child(const Child&) = delete;
  Child& operator=(const Child&) = delete;

  /// Waits until the output holds a whole line. False when the program ends before.
  bool wait_for_line();
  void send(int signal_number);
  /// Reads the output to its end and waits for the program.
  Outcome finish();
  /// Closes its end of the output, as when a pager is left, and waits for the program.
  Outcome finish_unread();

 private:
  bool read_some();
  int pid_ = -1;
  int output_ = -1;
  std::string out_, err_path_;
};

/// Runs to the end.
Outcome run_program(const std::vector<std::string>& arguments, const std::string& folder);

/// An empty folder that is removed with everything in it.
class ScratchFolder {
 public:
  ScratchFolder();
  ~ScratchFolder();
  ScratchFolder(const ScratchFolder&) = delete;
  ScratchFolder& operator=(const ScratchFolder&) = delete;
  const std::string& path() const { return path_; }
  /// Writes a file into it and returns its path.
  std::string write(const std::string& name, const std::string& text) const;

 private:
  std::string path_;
};

}  // namespace wanewall::test
