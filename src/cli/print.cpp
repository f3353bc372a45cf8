#include "cli/print.h"

#include <fmt/format.h>
#include <sys/ioctl.h>
#include <unistd.h>

#include <algorithm>
#include <cstdio>

#include "base/error.h"
#include "report/page.h"
#include "report/summary_text.h"

namespace thirdrung {

namespace {

int terminal_width() {
  winsize size{};
  if (isatty(STDOUT_FILENO) == 1 && ioctl(STDOUT_FILENO, TIOCGWINSZ, &size) == 0 && size.ws_col > 0)
    return std::clamp(static_cast<int>(size.ws_col), 60, 120);
  return 100;
}

}  // namespace

void say_stage(const std::string& stage, const std::string& what) {
  if (isatty(STDERR_FILENO) != 1) return;
  fmt::print(stderr, "{}{}\n", stage, what.empty() ? std::string() : ": " + what);
}

void print_summary(const std::filesystem::path& folder) {
  fmt::print("{}", summary_text({folder, terminal_width()}));
  const std::filesystem::path page = folder / "report.html";
  std::error_code ignored;
  if (std::filesystem::exists(page, ignored)) fmt::print("Page: {}\n", page.string());
  fmt::print("Tables: {}\n", folder.string());
  if (std::fflush(stdout) != 0) throw OutputError("The summary could not be printed.");
}

void print_page(const RunFile& run) {
  PageOptions options;
  options.folder = run.output;
  options.title = run.report.title;
  try {
    write_page(options);
  } catch (const InputError& fault) {
    fmt::print(stderr, "thirdrung: no page: {}\n", fault.what());
  }
}

}  // namespace thirdrung
