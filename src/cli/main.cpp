#include <fmt/format.h>

#include <cstdio>
#include <exception>
#include <new>

#include "base/error.h"
#include "base/parallel.h"
#include "cli/commands.h"
#include "pipeline/version.h"

namespace {

using thirdrung::ExitCode;

int leave(ExitCode code, const char* message) {
  if (*message != '\0') fmt::print(stderr, "thirdrung: {}\n", message);
  return static_cast<int>(code);
}

void add_commands(CLI::App& program) {
  thirdrung::add_run_command(program);
  thirdrung::add_check_command(program);
  thirdrung::add_stage_commands(program);
  thirdrung::add_summary_command(program);
  thirdrung::add_page_command(program);
  thirdrung::add_figures_command(program);
  thirdrung::add_unblind_command(program);
  thirdrung::add_simulate_command(program);
  thirdrung::add_train_command(program);
}

int run_program(int count, char** arguments) {
  CLI::App program{
      "From photometry of Type Ia supernovae to the intercept a_B of the magnitude-redshift relation, and H0.\n"
      "Everything is told in one run file; docs/run-file.md lists its keys. Start with: thirdrung check FILE",
      "thirdrung"};
  program.set_version_flag("--version", thirdrung::program_version());
  program.require_subcommand(1);
  program.get_formatter()->column_width(34);
  program.footer(
      "Exit codes: 0 done; 2 the command line is wrong; 3 an input is; 4 a result could not be written;\n"
      "5 too little is left to answer; 130 stopped on request, and the same command goes on from there.");
  add_commands(program);
  try {
    program.parse(count, arguments);
  } catch (const CLI::Success& done) {
    return program.exit(done);
  } catch (const CLI::ParseError& fault) {
    program.exit(fault, std::cerr, std::cerr);
    return static_cast<int>(ExitCode::usage);
  }
  return static_cast<int>(ExitCode::success);
}

}  // namespace

int main(int count, char** arguments) {
  thirdrung::catch_stop_signals();
  try {
    return run_program(count, arguments);
  } catch (const thirdrung::InputError& fault) {
    return leave(ExitCode::input, fault.what());
  } catch (const thirdrung::OutputError& fault) {
    return leave(ExitCode::output, fault.what());
  } catch (const thirdrung::NoResultError& fault) {
    return leave(ExitCode::no_result, fault.what());
  } catch (const thirdrung::Interrupted&) {
    return leave(ExitCode::interrupted, "stopped; what is finished is kept, and the same command goes on from there.");
  } catch (const std::bad_alloc&) {
    return leave(ExitCode::output, "the memory of this machine is used up.");
  } catch (const std::exception& fault) {
    fmt::print(stderr, "thirdrung: a fault of the program itself: {}\n", fault.what());
    return 1;
  }
}
