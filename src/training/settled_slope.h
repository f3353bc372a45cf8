#pragma once

#include <Eigen/Core>
#include <span>
#include <vector>

#include "training/time_scale.h"
#include "training/trainer.h"

namespace thirdrung {

/// The slope of the trainer's objective at templates near its optimum, for data near those it was trained on.
///
/// Unknowns, noise and robust weights of every supernova are settled at each template, from where the last call left
/// them. Spectra and smoothing, as good as quadratic, enter by their slope and curvature at the optimum.
class SettledSlope {
 public:
  SettledSlope(const TrainingState& state, const TrainerOptions& trainer);

  /// −∂(objective without the gauge)/∂coefficients.
  Eigen::VectorXd at(const SpectralTemplate& model, std::span<const TrainingSupernova> supernovae);

 private:
  struct Sums;

  void add(const SpectralTemplate& model, const TrainingSupernova& sn, const TimeScale& scale, SupernovaUnknowns& at,
           Eigen::VectorXd& weight, Sums& into) const;

  CoefficientLayout layout_;
  Eigen::VectorXd start_;
  NormalEquations fixed_;   ///< Spectra and smoothing.
  NormalEquations smooth_;  ///< The smoothing among them.
  std::vector<SupernovaUnknowns> unknowns_;
  std::vector<Eigen::VectorXd> robust_weights_;
  const TrainerOptions& trainer_;
};

}  // namespace thirdrung
