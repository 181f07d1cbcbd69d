// The program's door: reads the command line, runs the chosen command, turns every failure into its exit
// code.
#include <CLI/CLI.hpp>
#include <csignal>
#include <cstdio>
#include <exception>
#include <filesystem>
#include <iostream>
#include <new>
#include <string>
#include <system_error>
#include <vector>

#include "io/commands.hpp"
#include "io/errors.hpp"
#include "io/provenance.hpp"
#include "io/terminal.hpp"
#include "solver/problem.hpp"

namespace {

using wanewall::ExitCode;

constexpr const char* examples = R"(Examples:
  wanewall check drum.yaml                      what would be built, and whether it can work
  wanewall run drum.yaml                        compute it; writes drum.h5
  wanewall tables drum.h5                       reflection, power and probe tables
  wanewall probe drum.h5 --at "0 m, 0 m, 5 cm"  field at a point of the stored snapshots
  wanewall compare large.h5 drum.h5             by how much records differ
  wanewall shell predict drum.yaml              what its shell will reflect
  wanewall shell design drum.yaml               which layers it should have
  wanewall speed                                how fast this machine is

Exit codes:
  0 done   1 a fault of the program   2 the command line is wrong   3 the scene is wrong
  4 a file cannot be read or written   5 the run was stopped early   6 the fields became non-finite
  7 a goal was missed, where a verdict was asked for)";

ExitCode report(ExitCode code, const std::string& text) {
  std::cout.flush();
  std::fflush(stdout);
  wanewall::warn("wanewall: " + text + "\n");
  return code;
}

// Names the word that is wrong and the help that fits what the user was doing.
std::string explain_parse_error(const CLI::App* app, const CLI::Error& error) {
  std::string command = "wanewall";
  for (const CLI::App* sub : app->get_subcommands()) command += " " + sub->get_name();
  const bool no_command = app->get_subcommands().empty();
  const std::vector<std::string> words = app->remaining();
  std::string text = "wanewall: ";
  text += no_command && !words.empty() ? "there is no command " + words.front() : error.what();
  if (no_command) {
    text += "\n  allowed:";
    for (const CLI::App* sub : app->get_subcommands([](const CLI::App*) { return true; }))
      text += " " + sub->get_name();
  }
  return text + "\n  next: " + command + " --help\n";
}

ExitCode run_guarded(const wanewall::Action& action) {
  try {
    const ExitCode code = action();
    std::cout.flush();
    const bool flushed = std::fflush(stdout) == 0;
    if (!flushed || std::ferror(stdout) != 0 || !std::cout)
      throw wanewall::FileError("standard output could not be written\n  next: see whether its disk is full");
    return code;
  } catch (const wanewall::SceneError& error) {
    return report(ExitCode::scene, error.what());
  } catch (const wanewall::ProblemError& error) {
    return report(ExitCode::scene, error.what());
  } catch (const wanewall::FileError& error) {
    return report(ExitCode::file, error.what());
  } catch (const std::bad_alloc&) {
    return report(
        ExitCode::scene,
        "not enough memory for this scene\n"
        "  next: see what needs it with 'wanewall check', then make cells larger, the volume smaller, or "
        "record less");
  } catch (const std::system_error& error) {  // std::filesystem::filesystem_error is one of these
    return report(ExitCode::file, error.what());
  } catch (const std::exception& error) {
    return report(ExitCode::bug,
                  std::string("this is a bug: ") + error.what() +
                      "\n  next: please report it together with the scene and 'wanewall --version'");
  }
}

}  // namespace

int main(int argc, char** argv) {
  // A limit on the size of files is then a write that fails, told like a full disk, and not a sudden end.
  std::signal(SIGXFSZ, SIG_IGN);
  CLI::App app{"Electromagnetic scattering on a Yee lattice inside an audited absorbing shell.", "wanewall"};
  app.set_version_flag("--version", wanewall::version_text());
  app.require_subcommand(1);
  app.footer(examples);
  app.failure_message(explain_parse_error);

  wanewall::Action action;
  wanewall::add_check_command(app, action);
  wanewall::add_run_command(app, action);
  wanewall::add_tables_command(app, action);
  wanewall::add_probe_command(app, action);
  wanewall::add_compare_command(app, action);
  wanewall::add_shell_command(app, action);
  wanewall::add_speed_command(app, action);

  try {
    app.parse(argc, argv);
  } catch (const CLI::ParseError& error) {
    // The library's own exit codes are not ours: 0 for a request for help or the version, 2 for everything
    // else.
    const bool was_a_request = app.exit(error, std::cout, std::cerr) == 0;
    return static_cast<int>(was_a_request ? ExitCode::done : ExitCode::command_line);
  }
  return static_cast<int>(run_guarded(action));
}
