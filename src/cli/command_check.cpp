#include <fmt/format.h>

#include <cstdio>
#include <memory>

#include "cli/commands.h"
#include "pipeline/check.h"

namespace thirdrung {

namespace {

void print_check(const std::string& file) {
  const CheckResult result = check_run(read_run_file(file));
  for (const std::string& line : result.found) fmt::print("{}\n", line);
  if (!result.remarks.empty()) fmt::print("\nTo know before running:\n");
  for (const std::string& remark : result.remarks) fmt::print("- {}\n", remark);
  fmt::print("\n{}: everything can be read; run it with: thirdrung run {}\n", file, file);
}

}  // namespace

void add_check_command(CLI::App& program) {
  CLI::App* command = program.add_subcommand("check", "Read everything that a run file names, without running it.");
  command->footer(
      "Says what was found and which supernovae would be set aside; the first fault ends it with a sentence.");
  auto file = std::make_shared<std::string>();
  add_run_file_argument(*command, *file);
  command->callback([file] { print_check(*file); });
}

}  // namespace thirdrung
