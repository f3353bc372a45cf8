#pragma once

#include <Eigen/Core>
#include <span>
#include <vector>

#include "light/passband_catalogue.h"
#include "template/trained_template.h"
#include "training/selection.h"
#include "training/trainer.h"

namespace thirdrung {

/// Covariance of the trained coefficients, the inverse of the Gauss–Newton Hessian with every supernova's unknowns
/// eliminated, and the leading modes of it.
struct TemplateUncertainty {
  Eigen::MatrixXd covariance;  ///< All coefficients.
  Eigen::MatrixXd modes;       ///< covariance ≈ modes modes^T.
};

/// @param mode_count how many modes are kept: those of the correlation matrix with the largest eigenvalues.
TemplateUncertainty template_uncertainty(const NormalEquations& system, int mode_count);

/// Response of the coefficients to the calibration of every passband of the training set: −H⁻¹ ∂g/∂calibration, the
/// implicit-function theorem at the optimum (Gauss–Newton Hessian, noise and robust weights held).
///
/// @param standard_star needed where the catalogue's systems refer to it.
std::vector<CalibrationResponse> calibration_responses(
    const TrainingState& state, std::span<const TrainingSupernova> supernovae,
    std::span<const TrainingCandidate> candidates, std::span<const std::size_t> candidate_of,
    const PassbandCatalogue& catalogue, const std::optional<Spectrum>& standard_star, const Extinction& dust,
    const NormalEquations& system, std::span<const EliminatedSupernova> eliminated, int threads);

}  // namespace thirdrung
