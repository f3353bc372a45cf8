#pragma once

#include <string>
#include <vector>

#include "light/passband_catalogue.h"
#include "pipeline/run_file.h"

namespace thirdrung {

/// What a look at all inputs found.
struct CheckResult {
  std::vector<std::string> found;    ///< One line each of template, passbands, surveys, output.
  std::vector<std::string> remarks;  ///< Sentences: what would be set aside, which bands lie outside the template.
};

/// Reads everything that a run reads and starts nothing. Throws InputError or OutputError for what would stop the run.
CheckResult check_run(const RunFile& run);

/// Throws InputError if a [[systematic]] names a passband that the catalogue lacks, or a file that is not there.
void check_systematics(const RunFile& run, const PassbandCatalogue& catalogue);

}  // namespace thirdrung
