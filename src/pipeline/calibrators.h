#pragma once

#include <set>
#include <string>
#include <vector>

#include "ladder/host_distances.h"
#include "pipeline/inputs.h"
#include "pipeline/run_file.h"
#include "pipeline/standardisation_stage.h"
#include "sample/quality_cuts.h"
#include "standardisation/standardisation.h"
#include "tables/table.h"

namespace thirdrung {

// Calibrators of a run: supernovae of its surveys whose hosts have known distances. Their light curves are fitted with
// all others; they never enter the Hubble flow, nor the fit of alpha, beta and gamma.

/// With fewer calibrators than this their scatter is hardly tested, and one bad distance carries H0.
inline constexpr std::size_t few_calibrators = 5;

/// The calibrators that [join] names, empty if it names none. Throws as read_calibrators().
CalibratorList read_run_calibrators(const RunFile& run);
std::set<std::string> calibrator_names(const RunFile& run);

/// Throws InputError at the row of the calibrator that no survey lists, or that stands in the redshift range of the
/// Hubble flow.
void check_calibrators(const RunFile& run, const CalibratorList& list, const SurveySupernovae& supernovae,
                       const RedshiftOptions& redshifts);
/// The same, reading what it needs; does nothing for a run without calibrators.
void check_calibrators(const RunFile& run);

/// Which rows of the table "sample" are calibrators.
std::vector<bool> calibrator_rows(const Table& sample);
/// What the quality rules of the run, without the redshift range, say of every row.
CutResult calibrator_cuts(const RunFile& run, const Table& sample);
/// Names of the calibrators that pass them, in the order of the sample.
std::vector<std::string> good_calibrators(const RunFile& run, const Table& sample);

/// Which calibrators of a list are used, and why the others are not.
struct CalibratorChoice {
  std::vector<bool> used;
  std::vector<std::string> why_not;  ///< "" where used.
};
/// @param set_aside table "set-aside", for the reasons; may be empty.
CalibratorChoice choose_calibrators(const RunFile& run, const CalibratorList& list, const Table& sample,
                                    const Table& set_aside);

/// Standardised magnitudes of calibrators that the sample holds, in the order of `names`.
/// @param hidden_magnitude added to each, in a blind run [mag].
Magnitudes calibrator_magnitudes(const RunFile& run, const Table& sample, const std::vector<std::string>& names,
                                 const StandardisationCoefficients& coefficients, double hidden_magnitude);

}  // namespace thirdrung
