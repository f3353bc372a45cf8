#pragma once

#include <Eigen/Core>
#include <span>
#include <vector>

#include "template/coefficients.h"
#include "training/supernova_terms.h"
#include "training/training_set.h"

namespace thirdrung {

/// Gaussian prior of stretch and colour of the training supernovae, which fixes the scale of s and the zero of c.
struct UnknownsPrior {
  double s_mean = 1, s_width = 0.12;
  double c_mean = 0, c_width = 0.15;
};

/// Gauss–Newton system H δ = g of the template's coefficients, minimising ½ Σ r^T C^−1 r and what the freedom of the
/// supernovae's unknowns costs (spread_terms.h), which enters by its slope alone.
struct NormalEquations {
  Eigen::MatrixXd hessian;   ///< Lower triangle filled.
  Eigen::VectorXd gradient;  ///< −∂(objective)/∂coefficients.
  Eigen::VectorXd spread;    ///< The part of the objective's slope that is the unknowns' freedom and holds the time
                             ///< scale (time_scale.h), counted in gradient.

  explicit NormalEquations(int size)
      : hessian(Eigen::MatrixXd::Zero(size, size)),
        gradient(Eigen::VectorXd::Zero(size)),
        spread(Eigen::VectorXd::Zero(size)) {}
  void add(const NormalEquations& other) {
    hessian += other.hessian;
    gradient += other.gradient;
    spread += other.spread;
  }
};

/// What is left of one supernova after its own unknowns are eliminated: enough to recover their step from a step of the
/// coefficients.
struct EliminatedSupernova {
  Eigen::Matrix4d local_inverse = Eigen::Matrix4d::Zero();
  Eigen::Vector4d local_gradient = Eigen::Vector4d::Zero();
  Eigen::MatrixXd cross;  ///< ∂²/∂coefficients∂unknowns, coefficients × 4.

  Eigen::Vector4d step(const Eigen::VectorXd& coefficient_step) const {
    return local_inverse * (local_gradient - cross.transpose() * coefficient_step);
  }
};

/// State of a supernova within one iteration: model, noise (held fixed during the step) and residuals.
struct LinearisedSupernova {
  SupernovaModel model;
  SupernovaNoise noise;
  Eigen::VectorXd residual;
  std::vector<EpochGradient> gradients;
};

LinearisedSupernova linearise(const SpectralTemplate& model, const TrainingSupernova& sn, const SupernovaUnknowns& at,
                              const Eigen::VectorXd& robust_weight);

/// Sums the systems of many supernovae with their own unknowns eliminated exactly (Schur complement), so that cost and
/// memory grow linearly with their number. Deterministic for any number of threads.
///
/// @param robust_weights one vector a supernova. @param eliminated filled, one a supernova.
NormalEquations eliminate_supernovae(const SpectralTemplate& model, std::span<const TrainingSupernova> supernovae,
                                     std::span<const SupernovaUnknowns> unknowns,
                                     std::span<const Eigen::VectorXd> robust_weights, const UnknownsPrior& prior,
                                     int threads, std::vector<EliminatedSupernova>& eliminated);

/// ½ r^T C^−1 r plus the prior, with C as given.
double half_chi2(const TrainingSupernova& sn, const SupernovaNoise& noise, const Eigen::VectorXd& noise_flux,
                 const Eigen::VectorXd& residual, const SupernovaUnknowns& at, const UnknownsPrior& prior);

}  // namespace thirdrung
