#pragma once

#include <string>
#include <vector>

#include "pipeline/inputs.h"
#include "pipeline/output_folder.h"
#include "pipeline/run_file.h"

namespace thirdrung {

/// Writes summary.json, the answer for a machine, and provenance.json, where it comes from; from the result tables in
/// the folder, as far as the run has come.
void write_summary(const RunFile& run, const OutputFolder& folder, const std::vector<InputChecksum>& inputs);

/// What a reader of the results should know, each a sentence: few supernovae, fits set aside or not trusted, missing
/// masses, velocities or bands, remarks of the standardisation, a chi-square that chance does not allow, calibrators
/// that are few, left out or far off.
std::vector<std::string> run_warnings(const RunFile& run, const std::filesystem::path& folder);

}  // namespace thirdrung
