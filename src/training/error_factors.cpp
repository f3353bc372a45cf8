#include "training/error_factors.h"

#include <Eigen/Cholesky>
#include <algorithm>
#include <cmath>
#include <map>
#include <utility>

#include "base/parallel.h"
#include "training/scatter_likelihood.h"
#include "training/trainer.h"

namespace thirdrung {

namespace {

constexpr double largest_pull = 4.5;
constexpr int most_rounds = 10;
constexpr double settled = 0.01;

using Key = std::pair<std::string, std::string>;

/// A supernova without the epochs that are wild if its measured errors are multiplied by the factors.
TrainingSupernova without_wild_epochs(const SpectralTemplate& model, TrainingSupernova sn, const SupernovaUnknowns& at,
                                      const std::map<Key, double>& factor) {
  TrainingSupernova scaled = sn;
  for (const TrainingBand& band : scaled.bands) {
    const auto found = factor.find({sn.survey, band.passband});
    if (found == factor.end()) continue;
    for (std::size_t e = band.begin; e < band.end; ++e) scaled.epochs[e].flux_error *= found->second;
  }
  // With one degree of freedom the weight of a pull x is 2/(1 + x^2).
  const Eigen::VectorXd weight = robust_weights_of(model, scaled, at, 1);
  constexpr double least = 2 / (1 + largest_pull * largest_pull);
  keep_epochs(sn, [&](std::size_t e) { return weight(static_cast<Eigen::Index>(e)) >= least; });
  return sn;
}

}  // namespace

std::vector<ErrorFactor> error_factors(const SpectralTemplate& model, std::span<const TrainingSupernova> supernovae,
                                       std::span<const SupernovaUnknowns> unknowns, const UnknownsPrior& prior,
                                       TemplateScatter scatter, const ScatterOptions& options, int threads) {
  const ScatterLikelihood likelihood(model, supernovae, unknowns, prior, options, threads);
  if (likelihood.passbands().empty()) return {};
  Eigen::VectorXd nodes = likelihood.start();
  const Eigen::Index factors = likelihood.epoch_nodes() + likelihood.colour_nodes();
  const Eigen::Index first = scatter == TemplateScatter::estimated_along ? 0 : factors;
  const auto value = likelihood.climb(nodes, first, nodes.size() - first);
  const Eigen::MatrixXd information = value.information.bottomRightCorner(nodes.size() - first, nodes.size() - first);
  const Eigen::MatrixXd covariance = Eigen::LDLT<Eigen::MatrixXd>(information)
                                         .solve(Eigen::MatrixXd::Identity(information.rows(), information.rows()));
  std::vector<ErrorFactor> out;
  for (std::size_t b = 0; b < likelihood.passbands().size(); ++b) {
    const auto& passband = likelihood.passbands()[b];
    const Eigen::Index node = factors + static_cast<Eigen::Index>(b);
    const double factor = std::exp(nodes(node));
    out.push_back({passband.survey, passband.passband, factor,
                   factor * std::sqrt(covariance(node - first, node - first)), passband.supernovae, passband.epochs});
  }
  return out;
}

std::vector<ErrorFactor> error_factors_of_fits(const SpectralTemplate& model, const FittedSet& set, int threads) {
  constexpr UnknownsPrior wide{1, 100, 0, 100};
  std::map<Key, double> factor;
  std::vector<ErrorFactor> found;
  for (int round = 0; round < most_rounds; ++round) {
    std::vector<TrainingSupernova> supernovae(set.supernovae.size());
    parallel_for(supernovae.size(), threads, [&](std::size_t k) {
      supernovae[k] = without_wild_epochs(model, set.supernovae[k], set.unknowns[k], factor);
    });
    found = error_factors(model, supernovae, set.unknowns, wide, TemplateScatter::held, {}, threads);
    double largest = 0;
    for (const ErrorFactor& one : found) {
      double& before = factor.try_emplace({one.survey, one.passband}, 1.0).first->second;
      largest = std::max(largest, std::abs(std::log(one.factor / before)));
      before = one.factor;
    }
    if (largest < settled) break;
  }
  return found;
}

}  // namespace thirdrung
