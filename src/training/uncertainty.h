#pragma once

#include <Eigen/Core>

#include "template/rest_band.h"
#include "training/normal_equations.h"

namespace thirdrung {

/// Covariance of the trained coefficients, the inverse of the Gauss–Newton Hessian with every supernova's unknowns
/// eliminated, and the leading modes of what it says beyond conventions.
///
/// Where c = 0 and s = 1 stand is a convention: c = 0 is the colour B − V of the fiducial supernova at maximum, s = 1
/// its decline in B over 15 d. The training set fixes both by the means of its priors, and that freedom moves every
/// standardised magnitude alike, calibrators included, as a change of name would. The modes are conditional on these
/// two numbers of the template in hand; the covariance is not.
struct TemplateUncertainty {
  Eigen::MatrixXd covariance;  ///< All coefficients.
  Eigen::MatrixXd modes;       ///< Covariance given the fiducial B − V and decline ≈ modes modes^T.
};

/// Gradient of the fiducial supernova's ln flux in one band at one phase, in all coefficients.
Eigen::VectorXd log_flux_gradient(const SpectralTemplate& model, const RestBand& band, double phase);
/// Columns: gradients of the two conventions, the fiducial B − V at maximum and the decline in B over 15 d, in ln flux.
Eigen::MatrixXd convention_gradients(const SpectralTemplate& model);

/// @param mode_count how many modes are kept: those of the correlation matrix with the largest eigenvalues.
TemplateUncertainty template_uncertainty(const SpectralTemplate& model, const NormalEquations& system, int mode_count);

}  // namespace thirdrung
