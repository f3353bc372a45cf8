#include "standardisation/sampling.h"

#include <Eigen/Eigenvalues>
#include <algorithm>
#include <cmath>
#include <stdexcept>

#include "standardisation/deviates.h"

namespace thirdrung {

namespace {

/// Integrated autocorrelation time with the self-consistent window of Sokal (1989 lectures): stop at 5 times itself.
double autocorrelation_time(const std::vector<double>& chain) {
  const std::size_t n = chain.size();
  double mean = 0.0;
  for (const double x : chain) mean += x / static_cast<double>(n);
  const auto covariance = [&](std::size_t lag) {
    double sum = 0.0;
    for (std::size_t i = 0; i + lag < n; ++i) sum += (chain[i] - mean) * (chain[i + lag] - mean);
    return sum / static_cast<double>(n);
  };
  const double variance = covariance(0);
  double time = 1.0;
  for (std::size_t lag = 1; lag < n / 2 && static_cast<double>(lag) < 5.0 * time; ++lag)
    time += 2.0 * covariance(lag) / variance;
  return time;
}

/// ln of likelihood times prior, for the free parameters with widths given as themselves.
class Posterior {
 public:
  Posterior(std::span<const StandardisationDatum> data, const HierarchicalOptions& options,
            const StandardisationResult& fit)
      : population_(population_data(data, options)), base_(likelihood_parameters(fit)) {
    for (std::size_t i = 0; i < fit.parameters.size(); ++i) {
      if (!fit.parameters[i].held) free_.push_back(static_cast<Eigen::Index>(i));
    }
  }
  const std::vector<Eigen::Index>& free() const { return free_; }
  double operator()(const Eigen::VectorXd& x) const {
    Eigen::VectorXd p = base_;
    for (std::size_t k = 0; k < free_.size(); ++k) {
      const double value = x[static_cast<Eigen::Index>(k)];
      const bool width = is_width(static_cast<std::size_t>(free_[k]));
      if (width && !(value > 0.0)) return -HUGE_VAL;
      p[free_[k]] = width ? std::log(value) : value;
    }
    return -0.5 * population_likelihood(population_.data, population_.layout(), p, Derivatives::none).value;
  }

 private:
  PopulationData population_;
  Eigen::VectorXd base_;
  std::vector<Eigen::Index> free_;
};

}  // namespace

SamplingResult sample_hierarchical(std::span<const StandardisationDatum> data, const HierarchicalOptions& options,
                                   const StandardisationResult& fit, const SamplingOptions& sampling) {
  const Posterior posterior(data, options, fit);
  const auto& free = posterior.free();
  const auto dimensions = static_cast<Eigen::Index>(free.size());
  const std::size_t half = sampling.walkers / 2;
  if (sampling.walkers % 2 != 0 || half < free.size()) throw std::logic_error("too few walkers for the parameters");

  Deviates deviates(sampling.seed);
  const Eigen::MatrixXd covariance = fit.covariance(free, free);
  const Eigen::SelfAdjointEigenSolver<Eigen::MatrixXd> principal(covariance);
  const Eigen::MatrixXd root =
      principal.eigenvectors() * principal.eigenvalues().cwiseMax(0.0).cwiseSqrt().asDiagonal();
  std::vector<Eigen::VectorXd> walkers;
  std::vector<double> level;
  while (walkers.size() < sampling.walkers) {
    Eigen::VectorXd x(dimensions);
    for (Eigen::Index k = 0; k < dimensions; ++k) x[k] = deviates.normal();
    x = (root * x).eval();
    for (Eigen::Index k = 0; k < dimensions; ++k)
      x[k] += fit.parameters[static_cast<std::size_t>(free[static_cast<std::size_t>(k)])].value;
    const double value = posterior(x);
    if (!std::isfinite(value)) continue;
    walkers.push_back(x);
    level.push_back(value);
  }

  std::vector<std::vector<double>> walkers_mean(free.size());
  Eigen::VectorXd sum = Eigen::VectorXd::Zero(dimensions);
  Eigen::VectorXd square = Eigen::VectorXd::Zero(dimensions);
  std::size_t accepted = 0;
  const std::size_t total = sampling.discarded + sampling.steps;
  for (std::size_t step = 0; step < total; ++step) {
    for (std::size_t k = 0; k < sampling.walkers; ++k) {
      // A partner from the other half; z is drawn from g(z) ~ 1/sqrt(z) on [1/2, 2].
      const std::size_t first = k < half ? half : 0;
      const std::size_t partner = first + deviates.below(half);
      const double root_z = (1.0 + deviates.uniform()) / std::sqrt(2.0);
      const double z = root_z * root_z;
      const Eigen::VectorXd trial = walkers[partner] + z * (walkers[k] - walkers[partner]);
      const double value = posterior(trial);
      if (std::log(deviates.uniform()) < static_cast<double>(dimensions - 1) * std::log(z) + value - level[k]) {
        walkers[k] = trial;
        level[k] = value;
        ++accepted;
      }
    }
    if (step < sampling.discarded) continue;
    Eigen::VectorXd mean = Eigen::VectorXd::Zero(dimensions);
    for (const Eigen::VectorXd& x : walkers) {
      mean += x / static_cast<double>(walkers.size());
      sum += x;
      square += x.cwiseAbs2();
    }
    for (std::size_t k = 0; k < free.size(); ++k) walkers_mean[k].push_back(mean[static_cast<Eigen::Index>(k)]);
  }

  SamplingResult result;
  result.accepted = static_cast<double>(accepted) / static_cast<double>(total * sampling.walkers);
  const double samples = static_cast<double>(sampling.steps * sampling.walkers);
  for (std::size_t k = 0; k < free.size(); ++k) {
    const auto ik = static_cast<Eigen::Index>(k);
    SampledParameter p;
    p.name = fit.parameters[static_cast<std::size_t>(free[k])].name;
    p.mean = sum[ik] / samples;
    p.deviation = std::sqrt(std::max(0.0, square[ik] / samples - p.mean * p.mean));
    p.autocorrelation_steps = autocorrelation_time(walkers_mean[k]);
    result.parameters.push_back(p);
  }
  return result;
}

}  // namespace thirdrung
