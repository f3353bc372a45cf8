#include <memory>

#include "cli/commands.h"
#include "cli/print.h"
#include "pipeline/run_stages.h"

namespace thirdrung {

namespace {

struct StageCommand {
  const char* name;
  Stage stage;
  const char* help;
};

const StageCommand stage_commands[] = {
    {"fit", Stage::light_curves, "Fit the light curves: photometry to lightcurve-fits.ecsv."},
    {"select", Stage::sample, "Redshift frames and quality cuts: lightcurve-fits.ecsv to sample.ecsv."},
    {"standardise", Stage::standardisation, "alpha, beta, gamma and sigma_int: sample.ecsv to magnitudes.ecsv."},
    {"shift", Stage::systematics, "What each [[systematic]] does to every magnitude: to systematic-shifts.fits."},
    {"intercept", Stage::intercept, "a_B with its covariance and budget: magnitudes.ecsv to standardised.ecsv."},
    {"scan", Stage::scans, "How a_B moves with each choice: magnitudes.ecsv to scans.ecsv."},
    {"join", Stage::join, "H0 from a_B and a calibrated absolute magnitude: to join.ecsv."}};

struct Arguments {
  std::string file;
  int threads = -1;
  bool afresh = false;
};

void run_one(const Arguments& arguments, Stage stage) {
  RunFile run = read_run_file(arguments.file);
  if (arguments.threads >= 0) run.threads = arguments.threads;
  RunOptions options;
  options.first = options.last = stage;
  options.again = true;
  options.afresh = arguments.afresh;
  options.say = say_stage;
  run_stages(run, options);
  print_summary(run.output);
}

}  // namespace

void add_stage_commands(CLI::App& program) {
  for (const StageCommand& one : stage_commands) {
    CLI::App* command = program.add_subcommand(one.name, one.help);
    command->footer(
        "One stage of `run`: it works on the tables that the stages before it left in the output folder,\n"
        "and removes what later stages had made from older ones.");
    auto arguments = std::make_shared<Arguments>();
    add_run_file_argument(*command, arguments->file);
    if (one.stage == Stage::light_curves)
      command->add_flag("--afresh", arguments->afresh, "throw away what is in the output folder first");
    command->add_option("--threads", arguments->threads, "threads to use; 0: all cores")->check(CLI::NonNegativeNumber);
    command->callback([arguments, stage = one.stage] { run_one(*arguments, stage); });
  }
}

}  // namespace thirdrung
