#include <fmt/format.h>

#include <memory>

#include "cli/commands.h"
#include "report/figures.h"

namespace thirdrung {

namespace {

struct Arguments {
  std::string folder;
  std::string to;
  bool one_column = false;
};

void print_figures(const Arguments& arguments) {
  FigureOptions options;
  options.folder = arguments.folder;
  options.output_folder = arguments.to.empty() ? options.folder / "figures" : std::filesystem::path(arguments.to);
  options.width = arguments.one_column ? FigureWidth::one_column : FigureWidth::two_columns;
  for (const auto& file : write_figures(options).files) fmt::print("{}\n", file.string());
}

}  // namespace

void add_figures_command(CLI::App& program) {
  CLI::App* command =
      program.add_subcommand("figures", "Draw the figures of an output folder for a paper, SVG and PDF.");
  auto arguments = std::make_shared<Arguments>();
  command->add_option("FOLDER", arguments->folder, "output folder of a run")->required();
  command->add_option("--to", arguments->to, "folder for the figures (default: figures in the output folder)");
  command->add_flag("--one-column", arguments->one_column, "88 mm wide instead of 180 mm");
  command->callback([arguments] { print_figures(*arguments); });
}

}  // namespace thirdrung
