#pragma once

#include <Eigen/Core>
#include <span>

#include "template/spectral_template.h"
#include "training/normal_equations.h"

namespace thirdrung {

/// The direction in which the coefficients move when all stretches get a common factor, 1 − δ: the light curves stay as
/// they are (to first order in s − 1), if Φ gets δ (Γ − q Φ_q) and Γ gets δ (Γ − q Γ_q), and Γ besides what keeps the
/// gauge, δ b (Γ − q Φ_q), which is a change of the unit of s − 1.
struct TimeScale {
  Eigen::VectorXd direction;  ///< All coefficients, for δ = 1.
  double growth = 1;          ///< ∂flux/∂s grows by this × δ: 1 + b.
};

TimeScale time_scale(const SpectralTemplate& model);

/// What the freedom of s costs along the time scale, Σ ∂ ½ ln det(L^T C^-1 L + prior)/∂δ for a growth of one: each
/// supernova's 1 − Σ_ss/w², which is one where its light curve tells s better than the prior of width w does.
double time_scale_cost(double variance_of_s, const UnknownsPrior& prior);

/// Keeps slopes of the objective that do not know the time scale from moving the solution along it.
///
/// Nothing but the prior of s says where the time scale stands. The spread slope (spread_terms.h) holds Φ and the
/// unknowns, which both move along it, and would shift the zero of s by the squared width of the population, 0.01; the
/// smoothing would have the light curves broad and s small. A slope is corrected by a multiple of H d/(d^T H d), with d
/// the direction and H without the gauge: that moves the solution along d and nowhere else.
class HeldTimeScale {
 public:
  /// @param curvature H d.
  HeldTimeScale(TimeScale scale, const Eigen::VectorXd& curvature);

  /// Makes the spread slope along d what it is exactly. @param cost sum of time_scale_cost.
  void correct_spread(double cost, Eigen::VectorXd& slope) const;
  /// The part of a slope to be taken away from it so that it has none along d.
  Eigen::VectorXd part_along(const Eigen::VectorXd& slope) const { return slope.dot(scale_.direction) * pull_; }

 private:
  TimeScale scale_;
  Eigen::VectorXd pull_;
};

}  // namespace thirdrung
