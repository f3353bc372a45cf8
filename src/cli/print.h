#pragma once

#include <filesystem>
#include <string>

#include "pipeline/run_file.h"

namespace thirdrung {

/// A line on standard error for a stage that begins or is kept; silent unless that is a terminal.
void say_stage(const std::string& stage, const std::string& what);

/// The summary of an output folder on standard output, and where its files are.
void print_summary(const std::filesystem::path& folder);

/// Writes the page of a run; a page that cannot be written is a warning on standard error, not an error: the results
/// are there.
void print_page(const RunFile& run);

}  // namespace thirdrung
