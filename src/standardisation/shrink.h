#pragma once

#include <span>

#include "standardisation/hierarchical.h"

namespace thirdrung {

/// Fills shrunk_magnitude and shrunk_variance.
///
/// In the model (population_likelihood.h) the observed magnitude given the observed s and c is normal with mean
/// E = mu_m + V_mx V_xx^-1 (x - mu_x), x = (s, c), and variance V_mm - V_mx V_xx^-1 V_xm. The shrunk magnitude is
/// intercept + modulus + (m_b - E): the residual from the best linear prediction. Its weight 1/variance is what the
/// marginal likelihood gives the supernova. The variance of the modulus is left out of it, as from fit_variance.
/// @param parameters as PopulationLayout says.
void shrink_magnitudes(std::span<const StandardisationDatum> data, const PopulationData& population,
                       const Eigen::VectorXd& parameters, std::span<StandardisedMagnitude> magnitudes);

}  // namespace thirdrung
