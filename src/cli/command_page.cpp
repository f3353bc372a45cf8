#include <fmt/format.h>

#include <memory>

#include "cli/commands.h"
#include "report/page.h"

namespace thirdrung {

namespace {

void print_page_written(const PageOptions& options) {
  const PageResult result = write_page(options);
  fmt::print("{}: {:.1f} MB\n", result.page.string(), static_cast<double>(result.bytes) / 1e6);
  if (!result.lightcurve_folder.empty())
    fmt::print("{}: light curves, to be kept beside it\n", result.lightcurve_folder.string());
}

}  // namespace

void add_page_command(CLI::App& program) {
  CLI::App* command =
      program.add_subcommand("page", "Write the HTML page of an output folder: one file that a browser reads offline.");
  auto options = std::make_shared<PageOptions>();
  command->add_option("FOLDER", options->folder, "output folder of a run")->required();
  command->add_option("--to", options->output, "the HTML file (default: report.html in the folder)");
  command->add_option("--title", options->title, "heading of the page");
  command->callback([options] { print_page_written(*options); });
}

}  // namespace thirdrung
