#pragma once

#include <string>
#include <vector>

#include "pipeline/run_file.h"

namespace thirdrung {

/// What a look at all inputs found.
struct CheckResult {
  std::vector<std::string> found;    ///< One line each of template, passbands, surveys, output.
  std::vector<std::string> remarks;  ///< Sentences: what would be set aside, which bands lie outside the template.
};

/// Reads everything that a run reads and starts nothing. Throws InputError or OutputError for what would stop the run.
CheckResult check_run(const RunFile& run);

}  // namespace thirdrung
