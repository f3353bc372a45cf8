#pragma once

#include <optional>
#include <string>
#include <vector>

#include "hubbleflow/covariance_model.h"
#include "pipeline/run_file.h"
#include "pipeline/standardisation_stage.h"
#include "tables/table.h"

namespace thirdrung {

/// What the intercept stage leaves.
struct InterceptTables {
  Table intercept;     ///< quantity, value, error, unit: a_b, its parts, chi2, scatter and what else was fitted.
  Table standardised;  ///< One row a supernova of the sample: residuals, weights, single intercepts.
  Table influence;     ///< What each does to a_b.
  Table budget;        ///< Where the error comes from.
  Table derivatives;   ///< d a_b by each systematic input; without rows if there are none.
};

/// a_b by generalised least squares with the whole covariance, and its error taken apart.
/// @param model of the magnitudes, in their order.
/// Throws NoResultError if too few supernovae are in the redshift range.
InterceptTables fit_intercept_of(const RunFile& run, const Magnitudes& magnitudes, const CovarianceModel& model);

}  // namespace thirdrung
