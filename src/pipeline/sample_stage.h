#pragma once

#include <optional>
#include <set>
#include <string>

#include "pipeline/run_file.h"
#include "sample/quality_cuts.h"
#include "tables/table.h"

namespace thirdrung {

/// What the selection stage leaves.
struct SampleTables {
  Table sample;  ///< One row a supernova, surveys combined; docs/commands.md lists the columns.
  Table cuts;    ///< What each rule removes.
};

/// From the light-curve fits to the sample: surveys combined, redshifts taken to the flow frame, quality rules applied.
///
/// A supernova of several surveys is combined from its trusted fits (from all of them if none is trusted). Supernovae
/// that drop out before the rules (a flow redshift that is not positive, no row in the supernova table) stay in the
/// table, unused, with the reason. So do calibrators, which no rule is asked about here; only where there are any, a
/// column "calibrator" says which.
/// @param fits table "lightcurve-fits".
SampleTables make_sample(const RunFile& run, const Table& fits);
/// The same with the supernovae and the redshift options at hand, for a run that varies them.
SampleTables make_sample(const RunFile& run, const Table& fits, const std::vector<Supernova>& supernovae,
                         const RedshiftOptions& redshifts, const std::set<std::string>& calibrators = {});

/// The sample as make_sample leaves it, for what a row looks like to the quality rules. Used to vary the rules.
std::vector<CutSubject> cut_subjects(const Table& sample);

}  // namespace thirdrung
