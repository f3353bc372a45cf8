#pragma once

#include "hubbleflow/covariance_model.h"
#include "pipeline/run_file.h"
#include "pipeline/standardisation_stage.h"
#include "tables/table.h"

namespace thirdrung {

/// What the scan stage leaves.
struct ScanTables {
  Table scans;        ///< One row a setting.
  Table zrange_grid;  ///< Lower and upper redshift limits together; no rows unless scanned.
  Table sky_halves;   ///< The map of the difference over directions of the pole; no rows unless scanned.
};

/// How a_b moves with every choice that the run file lists, each against the baseline in the joint covariance.
/// @param model of all rows of the magnitudes, in their order.
/// @param sample table "sample", which the cuts and corrections are varied on.
ScanTables scan_choices(const RunFile& run, const Magnitudes& magnitudes, const CovarianceModel& model,
                        const Table& sample, const StandardisationCoefficients& coefficients);

}  // namespace thirdrung
