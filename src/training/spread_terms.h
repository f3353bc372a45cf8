#pragma once

#include <Eigen/Core>

#include "training/normal_equations.h"
#include "training/supernova_terms.h"

namespace thirdrung {

/// What the freedom of one supernova's unknowns costs a template: the slope of ½ tr(L^T C^-1 L Σ) in the coefficients
/// of Γ and K, added to `into`. L = ∂flux/∂(t_0, m_B, s, c), Σ the covariance of these four under data and prior.
///
/// Maximising jointly over template and unknowns lets the unknowns fit noise: Γ and K come out too steep and the scales
/// of s and c too short, by as much as the squared errors of the unknowns are of their spread. The marginal likelihood
/// does not; its Laplace approximation has ½ ln det(L^T C^-1 L + prior) besides, whose slope is that of the trace above
/// with Σ held, as in an expectation-maximisation step (Tierney & Kadane 1986, J. Am. Stat. Assoc. 81, 82; Dempster,
/// Laird & Rubin 1977, J. R. Stat. Soc. B 39, 1). Φ and the shares of the wavelengths in a band are held too: they
/// shape the mean light curve and only at second order what s and c do to it, but for the time scale, where the slope
/// is corrected (time_scale.h).
void add_spread_slope(const CoefficientLayout& layout, const TrainingSupernova& sn, const LinearisedSupernova& line,
                      const Eigen::Matrix4d& covariance, Eigen::VectorXd& into);

}  // namespace thirdrung
