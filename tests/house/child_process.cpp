#include "tests/house/child_process.hpp"

#include <fcntl.h>
#include <signal.h>
#include <stdlib.h>
#include <sys/ioctl.h>
#include <sys/wait.h>
#include <unistd.h>

#include <cerrno>
#include <filesystem>
#include <fstream>
#include <iterator>
#include <stdexcept>

namespace wanewall::test {
namespace {

int checked(int result, const char* what) {
  if (result < 0) throw std::runtime_error(std::string("test helper: ") + what + " failed");
  return result;
}

struct Ends {
  int ours, theirs;
};

Ends make_output(const std::string& output) {
  if (output != on_terminal && output != into_pipe)
    return {-1, checked(open(output.c_str(), O_WRONLY | O_CLOEXEC), "open of the device")};
  if (output == into_pipe) {
    int ends[2];
    checked(pipe2(ends, O_CLOEXEC), "pipe");
    return {ends[0], ends[1]};
  }
  const int ours = checked(posix_openpt(O_RDWR | O_NOCTTY | O_CLOEXEC), "posix_openpt");
  checked(grantpt(ours), "grantpt");
  checked(unlockpt(ours), "unlockpt");
  const int theirs = checked(open(ptsname(ours), O_RDWR | O_NOCTTY | O_CLOEXEC), "open of the terminal");
  const winsize size{24, 100, 0, 0};
  checked(ioctl(theirs, TIOCSWINSZ, &size), "TIOCSWINSZ");
  return {ours, theirs};
}

}  // namespace

Child::Child(const std::vector<std::string>& arguments, const std::string& folder,
             const std::string& output_to)
    : err_path_(folder + "/standard_error.txt") {
  const Ends output = make_output(output_to);
  output_ = output.ours;
  std::vector<std::string> words{WANEWALL_EXECUTABLE};
  words.insert(words.end(), arguments.begin(), arguments.end());
  std::vector<char*> argv;
  for (std::string& word : words) argv.push_back(word.data());
  argv.push_back(nullptr);

  pid_ = checked(fork(), "fork");
  if (pid_ == 0) {
    for (const int s : {SIGINT, SIGTERM, SIGHUP, SIGPIPE}) ::signal(s, SIG_DFL);
    setenv("TERM", "vt100", 1);
    // What other runs have left in the user's cache folder must not matter, nor anything be left there.
    unsetenv("XDG_CACHE_HOME");
    unsetenv("HOME");
    const int error = open(err_path_.c_str(), O_WRONLY | O_CREAT | O_TRUNC, 0600);
    const int nothing = open("/dev/null", O_RDONLY);
    if (chdir(folder.c_str()) != 0 || dup2(nothing, 0) < 0 || dup2(output.theirs, 1) < 0 ||
        dup2(error, 2) < 0)
      _exit(126);
    execv(argv[0], argv.data());
    _exit(127);
  }
  close(output.theirs);
}

Child::~Child() {
  if (pid_ > 0) {
    kill(pid_, SIGKILL);
    waitpid(pid_, nullptr, 0);
  }
  if (output_ >= 0) close(output_);
}

bool Child::read_some() {
  char buffer[4096];
  for (;;) {
    const ssize_t n = read(output_, buffer, sizeof buffer);
    if (n < 0 && errno == EINTR) continue;
    if (n <= 0) return false;  // a terminal whose other end is closed answers EIO
    out_.append(buffer, static_cast<std::size_t>(n));
    return true;
  }
}

bool Child::wait_for_line() {
  while (out_.find('\n') == std::string::npos)
    if (!read_some()) return false;
  return true;
}

void Child::send(int signal_number) {
  checked(kill(pid_, signal_number), "kill");
}

Outcome Child::finish() {
  while (read_some()) {
  }
  int status = 0;
  checked(waitpid(pid_, &status, 0), "waitpid");
  pid_ = -1;
  Outcome outcome;
  if (WIFEXITED(status)) outcome.exit_code = WEXITSTATUS(status);
  if (WIFSIGNALED(status)) outcome.signal = WTERMSIG(status);
  outcome.out = out_;
  std::ifstream error(err_path_, std::ios::binary);
  outcome.err.assign(std::istreambuf_iterator<char>(error), {});
  return outcome;
}

Outcome Child::finish_unread() {
  close(output_);
  output_ = -1;
  return finish();
}

Outcome run_program(const std::vector<std::string>& arguments, const std::string& folder) {
  return Child(arguments, folder).finish();
}

ScratchFolder::ScratchFolder() {
  std::string pattern = (std::filesystem::temp_directory_path() / "wanewall-XXXXXX").string();
  if (mkdtemp(pattern.data()) == nullptr) throw std::runtime_error("test helper: mkdtemp failed");
  path_ = pattern;
}

ScratchFolder::~ScratchFolder() {
  std::error_code ignored;
  std::filesystem::remove_all(path_, ignored);
}

std::string ScratchFolder::write(const std::string& name, const std::string& text) const {
  const std::string path = path_ + "/" + name;
  std::ofstream(path, std::ios::binary) << text;
  return path;
}

}  // namespace wanewall::test
