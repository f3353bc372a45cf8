#pragma once

#include <Eigen/Core>
#include <string>
#include <vector>

#include "hubbleflow/flow_sample.h"
#include "pipeline/run_file.h"
#include "standardisation/standardisation.h"
#include "tables/table.h"

namespace thirdrung {

/// What the standardisation leaves.
struct StandardisationTables {
  Table magnitudes;                ///< One row a supernova that any later stage may use.
  Table parameters;                ///< parameter, value, error, held; remarks as meta.
  std::vector<std::string> names;  ///< Of the rows of the covariance.
  Eigen::MatrixXd covariance;
};

/// Fits the standardisation to the sample's used supernovae and applies it to every trusted one within the redshifts
/// that scans reach. Calibrators are left to the join (calibrators.h).
///
/// Moduli are 5 log10(c H0 d_L / c), so that the parameter `intercept` is -5 a_B.
/// @param hidden_offset added to a_B: the magnitudes carry -5 times it, the parameter `intercept` too.
/// Throws NoResultError if too few supernovae are used.
StandardisationTables standardise_sample(const RunFile& run, const Table& sample, double hidden_offset);

/// Rows of the sample as the standardisation takes them, where `keep`.
std::vector<StandardisationDatum> standardisation_data(const RunFile& run, const Table& sample,
                                                       const std::vector<bool>& keep);

/// The fit itself, by the method of the run file, corrected for selection where a survey has a magnitude limit.
StandardisationResult fit_standardisation(const RunFile& run, const std::vector<StandardisationDatum>& data);

/// The magnitudes table read back.
struct Magnitudes {
  std::vector<FlowSupernova> supernovae;
  Eigen::VectorXd fit_variance, intrinsic_variance;  ///< [mag^2]
  std::vector<double> z_helio_error;
  std::vector<double> mass_probability;
  std::vector<double> selection_bias;  ///< Taken off the magnitudes; 0 where the table does not have it [mag].
  std::vector<bool> in_sample;         ///< Passes every quality rule but perhaps the redshift range.
};
/// Throws InputError for missing columns, wrong units, names that occur twice and variances that are not positive.
Magnitudes read_magnitudes(const Table& table);
/// The rows where `keep`.
Magnitudes some_of(const Magnitudes& all, const std::vector<bool>& keep);

}  // namespace thirdrung
