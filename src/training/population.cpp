#include "training/population.h"

#include <cmath>
#include <vector>

#include "base/parallel.h"

namespace thirdrung {

namespace {

struct Measured {
  double value = 0, variance = 0;
};

/// The likelihood has one maximum, and a hundred steps are far more than it takes to three digits.
PopulationWidth maximum_likelihood(std::span<const Measured> all) {
  PopulationWidth out{0, 0.1};
  for (int step = 0; step < 100; ++step) {
    const double spread = out.width * out.width;
    double weight = 0, mean = 0;
    for (const Measured& one : all) {
      weight += 1 / (spread + one.variance);
      mean += one.value / (spread + one.variance);
    }
    out.mean = mean / weight;
    double square = 0;
    for (const Measured& one : all) {
      const double share = spread / (spread + one.variance);
      square += std::pow(share * (one.value - out.mean), 2) + share * one.variance;
    }
    out.width = std::sqrt(square / static_cast<double>(all.size()));
  }
  return out;
}

}  // namespace

TrainingPopulation population_of(const TrainingState& state, std::span<const TrainingSupernova> supernovae,
                                 int threads) {
  constexpr UnknownsPrior wide{1, 1, 0, 1};
  std::vector<Measured> s(supernovae.size()), c(supernovae.size());
  parallel_for(supernovae.size(), threads, [&](std::size_t k) {
    SupernovaUnknowns at = state.unknowns[k];
    Eigen::VectorXd weight = state.robust_weights[k];
    const Eigen::Matrix4d covariance = fit_supernova(state.model, supernovae[k], wide, 0, at, weight);
    s[k] = {at.s, covariance(2, 2)};
    c[k] = {at.c, covariance(3, 3)};
  });
  return {maximum_likelihood(s), maximum_likelihood(c)};
}

}  // namespace thirdrung
