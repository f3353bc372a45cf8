#include "training/scatter_fit.h"

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

}  // namespace thirdrung
