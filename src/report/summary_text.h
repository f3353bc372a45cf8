#pragma once

#include <filesystem>
#include <string>

namespace thirdrung {

struct SummaryTextOptions {
  std::filesystem::path folder;  ///< Output folder of a run.
  int width = 100;               ///< Columns of the terminal; sentences are wrapped at it (at least 40).
};

/// The first screen of the page as plain text: the answer, what qualifies it, what each cut removed, warnings.
///
/// Control characters in names and messages are replaced, so that no file can steer the terminal.
/// Throws InputError if the folder holds no result of a run.
std::string summary_text(const SummaryTextOptions& options);

}  // namespace thirdrung
