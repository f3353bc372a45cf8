#pragma once

#include "pipeline/run_file.h"
#include "pipeline/run_section.h"

namespace thirdrung {

// One reader a section of the run file; each fills its part of the RunFile and refuses unknown keys.

void read_run_section(RunSection section, RunFile& run);
void read_template_section(RunSection section, RunFile& run);
void read_passbands_section(RunSection section, RunFile& run);
void read_survey_section(RunSection section, RunFile& run);
void read_milky_way_section(RunSection section, RunFile& run);
void read_lightcurve_section(RunSection section, RunFile& run);
void read_redshift_section(RunSection section, RunFile& run);
void read_cuts_section(RunSection section, RunFile& run);
void read_standardisation_section(RunSection section, RunFile& run);
void read_selection_section(RunSection section, RunFile& run);
void read_intercept_section(RunSection section, RunFile& run);
void read_systematic_section(RunSection section, RunFile& run);
void read_scans_section(RunSection section, RunFile& run);
void read_join_section(RunSection section, RunFile& run);
void read_report_section(RunSection section, RunFile& run);

/// Throws InputError at `surveys` for a survey that the run does not have, with the nearest that it has.
void refuse_unknown_surveys(const std::vector<std::string>& surveys, const RunSection& section, const RunFile& run);

}  // namespace thirdrung
