#include <fmt/format.h>

#include <memory>

#include "cli/commands.h"
#include "pipeline/simulation_file.h"
#include "simulation/write_simulation.h"
#include "template/template_file.h"

namespace thirdrung {

namespace {

struct Arguments {
  std::string file;
  std::string template_file;
  std::string to;
  int threads = 0;
};

void run_simulation(const Arguments& arguments) {
  SimulationOptions options = read_simulation_file(arguments.file);
  options.threads = arguments.threads;
  const SimulatedSample sample = simulate(options, read_template(arguments.template_file).model);
  write_simulation(sample, options, arguments.to);
  std::size_t measurements = 0;
  for (const LightCurve& light_curve : sample.light_curves) measurements += light_curve.epochs.size();
  fmt::print("{} supernovae, {} light curves, {} measurements; true a_B = {:.5f}\n", sample.truths.size(),
             sample.light_curves.size(), measurements, sample.a_b);
  fmt::print("written to {}\n", arguments.to);
}

}  // namespace

void add_simulate_command(CLI::App& program) {
  CLI::App* command = program.add_subcommand(
      "simulate", "Draw surveys with a known a_B and write them in the input formats; docs/simulation.md.");
  auto arguments = std::make_shared<Arguments>();
  command->add_option("FILE", arguments->file, "what to simulate, TOML")->required();
  command->add_option("--template", arguments->template_file, "spectral template, FITS")->required();
  command->add_option("--to", arguments->to, "folder to write to; files that are there are replaced")->required();
  command->add_option("--threads", arguments->threads, "threads to use; 0: all cores")->check(CLI::NonNegativeNumber);
  command->callback([arguments] { run_simulation(*arguments); });
}

}  // namespace thirdrung
