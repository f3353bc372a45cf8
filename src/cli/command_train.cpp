#include <fmt/format.h>

#include <memory>

#include "cli/commands.h"
#include "pipeline/training_file.h"
#include "template/spectral_template.h"

namespace thirdrung {

namespace {

struct TrainArguments {
  std::string file;
  TrainingOutput output;
  int threads = 0;
};

void print_training(const TrainArguments& arguments) {
  const TrainingResult result =
      train_from_file(read_training_file(arguments.file), arguments.output, arguments.threads);
  const SpectralTemplate& model = result.trained.model;
  fmt::print("Template {}\n", model.name);
  fmt::print("  trained on       {} supernovae, {} spectra; {} supernovae left out (left-out.ecsv)\n",
             result.selection.supernovae.size(), result.state.spectra.size(), result.selection.left_out.size());
  fmt::print("  fiducial         B-V at maximum {:+.3f} mag, dm15(B) {:.3f} mag\n",
             model.b_magnitude(0) - model.v_magnitude(0), model.dm15_b(1));
  fmt::print("  population       s {:.3f} ± {:.3f}, c {:+.3f} ± {:.3f} mag\n", result.population.s.mean,
             result.population.s.width, result.population.c.mean, result.population.c.width);
  fmt::print("  gauge            largest error {:.1e}\n", gauge_errors(model).largest());
  fmt::print("  file             {}\n  tables           {}\n", arguments.output.template_file.string(),
             arguments.output.folder.string());
  for (const std::string& warning : result.warnings) fmt::print("  Caution: {}\n", warning);
}

}  // namespace

void add_train_command(CLI::App& program) {
  CLI::App* command =
      program.add_subcommand("train", "Train a spectral template on light curves (and spectra) of a training file.");
  auto arguments = std::make_shared<TrainArguments>();
  command->add_option("FILE", arguments->file, "training file, TOML (docs/template.md)")->required();
  command->add_option("--template", arguments->output.template_file, "the template to write, .fits or .fits.gz")
      ->required();
  command->add_option("--tables", arguments->output.folder, "folder for the tables of the training run")->required();
  command->add_option("--threads", arguments->threads, "threads (0: all cores)");
  command->callback([arguments] { print_training(*arguments); });
}

}  // namespace thirdrung
