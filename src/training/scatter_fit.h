#pragma once

#include <Eigen/Core>
#include <span>

#include "training/normal_equations.h"

namespace thirdrung {

/// Weak Gaussian prior that ties neighbouring nodes of ln ε and ln κ, so that nodes without data follow those with.
struct ScatterOptions {
  double neighbour_width = 0.7;  ///< Of the difference of neighbouring nodes' logarithms.
  double level_width = 1.5;      ///< About ln 0.04 (ε) and ln 0.03 (κ).
  double factor_width = 0.5;     ///< Of the logarithm of a factor on measured errors, about 0.
  int iterations = 40;
};

/// Estimates ε and κ by restricted maximum likelihood (scatter_likelihood.h), measured errors as they are.
///
/// Changes the scatter of `model`; leaves everything else. Returns the restricted log-likelihood reached.
double fit_scatter(SpectralTemplate& model, std::span<const TrainingSupernova> supernovae,
                   std::span<const SupernovaUnknowns> unknowns, const UnknownsPrior& prior,
                   const ScatterOptions& options, int threads);

}  // namespace thirdrung
