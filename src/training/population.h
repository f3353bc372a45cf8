#pragma once

#include <span>

#include "training/trainer.h"

namespace thirdrung {

/// A Gaussian population.
struct PopulationWidth {
  double mean = 0, width = 0;
};

/// Stretches and colours of a training set.
struct TrainingPopulation {
  PopulationWidth s, c;
};

/// Means and widths of s and c by maximum likelihood over the training set, each supernova's own error allowed for
/// (expectation-maximisation; Dempster, Laird & Rubin 1977, J. R. Stat. Soc. B 39, 1). Every supernova is fitted anew
/// to the template with priors too wide to count. The widths of the training's prior should be these (spread_terms.h).
TrainingPopulation population_of(const TrainingState& state, std::span<const TrainingSupernova> supernovae,
                                 int threads);

}  // namespace thirdrung
