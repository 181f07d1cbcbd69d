// The commands of the program. Each adds itself to the command line and returns the exit code when it is run.
#pragma once

#include <CLI/CLI.hpp>
#include <functional>

#include "io/errors.hpp"

namespace wanewall {

/// Set by the chosen command while the command line is parsed; called by main once parsing is done.
using Action = std::function<ExitCode()>;

void add_check_command(CLI::App& app, Action& action);
void add_run_command(CLI::App& app, Action& action);
void add_tables_command(CLI::App& app, Action& action);
void add_probe_command(CLI::App& app, Action& action);
void add_compare_command(CLI::App& app, Action& action);
void add_shell_command(CLI::App& app, Action& action);
void add_speed_command(CLI::App& app, Action& action);

}  // namespace wanewall
