#include <fmt/format.h>

#include <memory>

#include "cli/commands.h"
#include "pipeline/blinding.h"

namespace thirdrung {

namespace {

struct Arguments {
  std::string file;
  std::string by;
};

void print_unblinding(const Arguments& arguments) {
  const Unblinding record = unblind(read_run_file(arguments.file), arguments.by);
  fmt::print("Unblinded on {} by {}. Show the result with: thirdrung run {}\n", record.when, record.by, arguments.file);
}

}  // namespace

void add_unblind_command(CLI::App& program) {
  CLI::App* command = program.add_subcommand("unblind", "Take the hidden offset off a blind run, for good.");
  command->footer("Who did it, when and with which inputs is recorded.");
  auto arguments = std::make_shared<Arguments>();
  add_run_file_argument(*command, arguments->file);
  command->add_option("--by", arguments->by, "name of the person who unblinds")->required();
  command->callback([arguments] { print_unblinding(*arguments); });
}

}  // namespace thirdrung
