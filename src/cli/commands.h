#pragma once

#include <CLI/CLI.hpp>
#include <string>

namespace thirdrung {

// One function a command: it adds the command to the program with its options, and what to do when it is called. A
// command reads its arguments, calls one function of the rooms below, and prints. Errors leave as exceptions (error.h)
// and become one sentence and an exit code in main.cpp.

void add_run_command(CLI::App& program);
void add_check_command(CLI::App& program);
void add_stage_commands(CLI::App& program);
void add_page_command(CLI::App& program);
void add_figures_command(CLI::App& program);
void add_summary_command(CLI::App& program);
void add_unblind_command(CLI::App& program);
void add_simulate_command(CLI::App& program);
void add_train_command(CLI::App& program);

/// Argument FILE, a run file.
void add_run_file_argument(CLI::App& command, std::string& file);

}  // namespace thirdrung
