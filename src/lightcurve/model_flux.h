#pragma once

#include <Eigen/Core>
#include <vector>

#include "lightcurve/observed_bands.h"

namespace thirdrung {

/// (t_0 − reference date, m_B, s, c).
using Parameters = Eigen::Vector4d;
/// Derivatives of the epochs' fluxes by the four parameters.
using FluxSlopes = Eigen::Matrix<double, Eigen::Dynamic, 4>;

/// The observations that a fit uses: indices into ObservedBands::observations, increasing, so band by band.
using Selection = std::vector<std::size_t>;

/// Observations within the phases of the options and of the template at these parameters.
Selection select(const ObservedBands& observed, const SpectralTemplate& model, const Parameters& at,
                 const FitOptions& options);

/// Model flux [uJy] of the selected observations, and its slopes.
void model_flux(const ObservedBands& observed, const Selection& selection, const Parameters& at, Eigen::VectorXd& flux,
                FluxSlopes& slopes);

/// Rest-frame phase of an observation [d].
inline double phase_of(const ObservedBands& observed, const Observation& observation, const Parameters& at) {
  return (observation.time - at[0]) / (1 + observed.z);
}

}  // namespace thirdrung
