#include <memory>

#include "cli/commands.h"
#include "cli/print.h"

namespace thirdrung {

void add_summary_command(CLI::App& program) {
  CLI::App* command = program.add_subcommand("summary", "Print the summary of an output folder again.");
  auto folder = std::make_shared<std::string>();
  command->add_option("FOLDER", *folder, "output folder of a run")->required();
  command->callback([folder] { print_summary(*folder); });
}

}  // namespace thirdrung
