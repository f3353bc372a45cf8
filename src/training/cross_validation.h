#pragma once

#include <span>
#include <string>
#include <vector>

#include "training/trainer.h"

namespace thirdrung {

/// How the strength of the smoothing is chosen.
struct CrossValidationOptions {
  int folds = 5;
  double factor = 5;        ///< Ratio of neighbouring strengths that are tried.
  int sweeps = 2;           ///< Passes over the kinds of smoothing.
  double needed_sigma = 1;  ///< Gain, in its own errors, that a less smooth template must bring.
};

/// One smoothing that was tried.
struct CrossValidationPoint {
  std::string kind;  ///< Which strength was changed.
  Smoothness smoothness;
  double score =
      0;  ///< −ln of the predictive likelihood of the held-out supernovae, summed over folds; lower is better.
  double gain = 0;        ///< Fall of the score against the best so far,
  double gain_error = 0;  ///< and the error of that difference, from its scatter over supernovae.
  bool chosen = false;
};

struct CrossValidationResult {
  Smoothness best;
  std::vector<CrossValidationPoint> points;
};

/// Fold of each supernova: they are dealt in order, so that every survey is spread over all folds.
int fold_of(std::size_t supernova, int folds);

/// Chooses the smoothing by predicting supernovae that were held out.
///
/// For each fold the template of the other folds is reached by one Gauss–Newton step from the state given (which should
/// be converged for the present smoothing); the held-out light curves are then fitted to it, and scored by their
/// marginal likelihood with noise model and robust weights held. Strengths are changed one at a time, up and down by
/// the factor, as long as the score falls.
CrossValidationResult cross_validate(const TrainingState& state, std::span<const TrainingSupernova> supernovae,
                                     const TrainerOptions& trainer, const CrossValidationOptions& options);

}  // namespace thirdrung
