#pragma once

#include <Eigen/Core>
#include <string>
#include <vector>

#include "template/coefficients.h"
#include "template/spectral_template.h"

namespace thirdrung {

/// First-order change of the trained coefficients with the calibration of one passband of the training set.
///
/// By the implicit-function theorem at the optimum, −H⁻¹ ∂g/∂calibration; coefficients in the order of
/// CoefficientLayout.
struct CalibrationResponse {
  std::string passband;
  Eigen::VectorXd zero_point;  ///< Per magnitude added to every tabulated magnitude of the band.
  Eigen::VectorXd wavelength;  ///< Per angstrom that the band's curve is moved redward.
};

/// A template with what training says of its uncertainty.
struct TrainedTemplate {
  SpectralTemplate model;
  /// Covariance of the coefficients as modes × modes^T; one column a mode, coefficients in the order of
  /// CoefficientLayout.
  Eigen::MatrixXd covariance_modes;
  std::vector<CalibrationResponse> responses;
};

/// The template with its coefficients moved by `step`, in the order of CoefficientLayout.
SpectralTemplate moved_template(const SpectralTemplate& model, const Eigen::VectorXd& step);

}  // namespace thirdrung
