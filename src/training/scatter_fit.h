#pragma once

#include <Eigen/Core>
#include <span>
#include <vector>

#include "training/normal_equations.h"

namespace thirdrung {

/// Weak Gaussian prior that ties neighbouring nodes of ln ε and ln κ, so that nodes without data follow those with.
struct ScatterOptions {
  double neighbour_width = 0.7;  ///< Of the difference of neighbouring nodes' logarithms.
  double level_width = 1.5;      ///< About ln 0.04 (ε) and ln 0.03 (κ).
  int iterations = 40;
};

/// Estimates ε and κ by restricted maximum likelihood: each supernova's four unknowns are integrated out along the
/// linear model, so that the freedom they take from the residuals is paid for (Patterson & Thompson 1971, Biometrika
/// 58, 545).
///
/// Changes the scatter of `model`; leaves everything else. Returns the restricted log-likelihood reached.
double fit_scatter(SpectralTemplate& model, std::span<const TrainingSupernova> supernovae,
                   std::span<const SupernovaUnknowns> unknowns, std::span<const Eigen::VectorXd> robust_weights,
                   const UnknownsPrior& prior, const ScatterOptions& options, int threads);

}  // namespace thirdrung
