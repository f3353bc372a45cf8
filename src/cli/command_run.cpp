#include <fmt/format.h>

#include <memory>

#include "cli/commands.h"
#include "cli/print.h"
#include "pipeline/run_stages.h"
#include "report/figures.h"
#include "report/page.h"

namespace thirdrung {

namespace {

struct Arguments {
  std::string file;
  int threads = -1;
  bool afresh = false;
  bool no_page = false;
};

void run_all(const Arguments& arguments) {
  RunFile run = read_run_file(arguments.file);
  if (arguments.threads >= 0) run.threads = arguments.threads;
  RunOptions options;
  options.afresh = arguments.afresh;
  options.say = say_stage;
  run_stages(run, options);
  if (run.report.page && !arguments.no_page) print_page(run);
  if (run.report.figures) write_figures({run.output, run.output / "figures", FigureWidth::two_columns});
  print_summary(run.output);
}

}  // namespace

void add_run_command(CLI::App& program) {
  CLI::App* command = program.add_subcommand("run", "Do everything that a run file asks for, from photometry to a_B.");
  command->footer("Results go to its output folder. Stopped runs go on where they were; what has not changed is kept.");
  auto arguments = std::make_shared<Arguments>();
  add_run_file_argument(*command, arguments->file);
  command->add_flag("--afresh", arguments->afresh, "throw away what is in the output folder and begin anew");
  command->add_flag("--no-page", arguments->no_page, "do not write the HTML page");
  command->add_option("--threads", arguments->threads, "threads to use; 0: all cores (default: what the run file says)")
      ->check(CLI::NonNegativeNumber);
  command->callback([arguments] { run_all(*arguments); });
}

void add_run_file_argument(CLI::App& command, std::string& file) {
  command.add_option("FILE", file, "run file (TOML)")->required();
}

}  // namespace thirdrung
