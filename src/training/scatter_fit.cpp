#include "training/scatter_fit.h"

#include <Eigen/Cholesky>
#include <cmath>

#include "training/scatter_likelihood.h"

namespace thirdrung {

double fit_scatter(SpectralTemplate& model, std::span<const TrainingSupernova> supernovae,
                   std::span<const SupernovaUnknowns> unknowns, const UnknownsPrior& prior,
                   const ScatterOptions& options, int threads) {
  const ScatterLikelihood likelihood(model, supernovae, unknowns, prior, options, threads);
  Eigen::VectorXd nodes = likelihood.start();
  const double reached =
      likelihood.climb(nodes, 0, likelihood.epoch_nodes() + likelihood.colour_nodes()).log_likelihood;
  using RowMajor = Eigen::Matrix<double, Eigen::Dynamic, Eigen::Dynamic, Eigen::RowMajor>;
  model.log_epoch_scatter =
      Eigen::Map<const RowMajor>(nodes.data(), model.log_epoch_scatter.rows(), model.log_epoch_scatter.cols());
  model.log_colour_scatter = nodes.segment(likelihood.epoch_nodes(), likelihood.colour_nodes());
  return reached;
}

std::vector<ErrorFactor> error_factors(const SpectralTemplate& model, std::span<const TrainingSupernova> supernovae,
                                       std::span<const SupernovaUnknowns> unknowns, const UnknownsPrior& prior,
                                       TemplateScatter scatter, const ScatterOptions& options, int threads) {
  const ScatterLikelihood likelihood(model, supernovae, unknowns, prior, options, threads);
  if (likelihood.passbands().empty()) return {};
  Eigen::VectorXd nodes = likelihood.start();
  const Eigen::Index factors = likelihood.epoch_nodes() + likelihood.colour_nodes();
  const Eigen::Index first = scatter == TemplateScatter::held ? factors : 0;
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

}  // namespace thirdrung
