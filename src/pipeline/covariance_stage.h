#pragma once

#include <filesystem>
#include <string>
#include <vector>

#include "hubbleflow/covariance_model.h"
#include "pipeline/run_file.h"
#include "pipeline/standardisation_stage.h"

namespace thirdrung {

/// The coefficients of the standardisation with their covariance, as its stage left them.
struct CoefficientCovariance {
  std::vector<std::string> names;
  Eigen::MatrixXd covariance;
};

/// Writes, and reads, `standardisation-covariance.fits`: the image "covariance" and the table "parameters".
void write_coefficient_covariance(const CoefficientCovariance& coefficients, const std::filesystem::path& path);
CoefficientCovariance read_coefficient_covariance(const std::filesystem::path& path);

/// Names of the parts that calibrators have too.
inline constexpr const char* light_curve_part = "light-curve fits";
inline constexpr const char* intrinsic_part = "intrinsic scatter";

/// J Sigma J^T with J the derivatives of the magnitudes by alpha, beta, gamma: s - 1, -c, P - 1/2. It does not weigh.
CovariancePart coefficients_part(const Magnitudes& magnitudes, const CoefficientCovariance& coefficients);

/// The covariance of the standardised magnitudes in its parts: light-curve fit, intrinsic scatter, peculiar velocities
/// and redshift errors, alpha, beta and gamma (common to all supernovae), coherent flows if asked for, and the
/// systematics.
CovarianceModel make_covariance(const RunFile& run, const Magnitudes& magnitudes,
                                const CoefficientCovariance& coefficients, std::vector<SystematicShift> systematics);

/// Writes `covariance.fits`: images "total", "statistical", "systematic", "weighting" (the total
/// without the errors of alpha, beta and gamma), one for each statistical part that correlates
/// supernovae, "diagonals" (parts that do not), "shifts" (one row a systematic), and tables that name their rows.
void write_covariance(const CovarianceModel& model, const std::filesystem::path& path);

}  // namespace thirdrung
