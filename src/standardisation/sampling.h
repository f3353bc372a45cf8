#pragma once

#include <cstdint>
#include <span>
#include <string>
#include <vector>

#include "standardisation/hierarchical.h"

namespace thirdrung {

/// Settings of the sampling check.
struct SamplingOptions {
  std::size_t walkers = 64;  ///< At least twice the number of free parameters; even.
  std::size_t steps = 2000;  ///< Of every walker after the first `discarded`.
  std::size_t discarded = 500;
  std::uint64_t seed = 1;
};

/// Mean and spread of one parameter over the sampled posterior.
struct SampledParameter {
  std::string name;
  double mean = 0.0;
  double deviation = 0.0;
  double autocorrelation_steps = 0.0;  ///< Integrated autocorrelation time of the walkers' mean [steps].
};

struct SamplingResult {
  std::vector<SampledParameter> parameters;  ///< The free ones, in the order of the fit.
  double accepted = 0.0;                     ///< Fraction of moves.
};

/// Samples the marginal likelihood about a fit, to check the errors taken from its curvature.
///
/// Affine-invariant ensemble of Goodman & Weare 2010 (Comm. App. Math. Comp. Sci. 5, 65, stretch move, a = 2), started
/// from the fit's normal approximation. Prior flat in every parameter; for sigma_int and the widths flat in the width
/// itself. Deterministic for a seed.
SamplingResult sample_hierarchical(std::span<const StandardisationDatum> data, const HierarchicalOptions& options,
                                   const StandardisationResult& fit, const SamplingOptions& sampling = {});

}  // namespace thirdrung
