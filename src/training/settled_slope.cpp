#include "training/settled_slope.h"

#include "base/parallel.h"
#include "training/spread_terms.h"

namespace thirdrung {

struct SettledSlope::Sums {
  explicit Sums(int size)
      : data(Eigen::VectorXd::Zero(size)),
        spread(Eigen::VectorXd::Zero(size)),
        curvature(Eigen::VectorXd::Zero(size)) {}
  void add(const Sums& other) {
    data += other.data;
    spread += other.spread;
    curvature += other.curvature;
    time_scale_cost += other.time_scale_cost;
  }
  Eigen::VectorXd data, spread;
  Eigen::VectorXd curvature;  ///< Hessian of the light curves times the time scale's direction.
  double time_scale_cost = 0;
};

SettledSlope::SettledSlope(const TrainingState& state, const TrainerOptions& trainer)
    : layout_(state.model),
      start_(layout_.gather(state.model)),
      fixed_(layout_.size()),
      smooth_(layout_.size()),
      unknowns_(state.unknowns),
      robust_weights_(state.robust_weights),
      trainer_(trainer) {
  TrainingState held = state;
  add_spectra_and_smoothness(held, trainer, fixed_);
  add_smoothness(state.model, trainer.smoothness, smooth_);
}

Eigen::VectorXd SettledSlope::at(const SpectralTemplate& model, std::span<const TrainingSupernova> supernovae) {
  constexpr std::size_t groups = 4;  // Summed in order, whatever the number of threads.
  const TimeScale scale = time_scale(model);
  std::vector<Sums> sums(groups, Sums(layout_.size()));
  parallel_for(groups, trainer_.threads, [&](std::size_t group) {
    for (std::size_t k = group; k < supernovae.size(); k += groups) {
      add(model, supernovae[k], scale, unknowns_[k], robust_weights_[k], sums[group]);
    }
  });
  Sums& all = sums.front();
  for (std::size_t group = 1; group < groups; ++group) all.add(sums[group]);
  const Eigen::VectorXd moved = layout_.gather(model) - start_;
  const HeldTimeScale held(scale, all.curvature + fixed_.hessian.selfadjointView<Eigen::Lower>() * scale.direction);
  held.correct_spread(all.time_scale_cost, all.spread);
  const Eigen::VectorXd smooth = smooth_.gradient - smooth_.hessian.selfadjointView<Eigen::Lower>() * moved;
  return all.data - all.spread + fixed_.gradient - fixed_.hessian.selfadjointView<Eigen::Lower>() * moved -
         held.part_along(smooth);
}

void SettledSlope::add(const SpectralTemplate& model, const TrainingSupernova& sn, const TimeScale& scale,
                       SupernovaUnknowns& at, Eigen::VectorXd& weight, Sums& into) const {
  const Eigen::Matrix4d covariance = fit_supernova(model, sn, trainer_.prior, trainer_.robust_degrees, at, weight);
  const LinearisedSupernova line = linearise(model, sn, at, weight);
  Eigen::MatrixXd columns(line.residual.size(), 2);
  columns.col(0) = line.residual;
  for (const TrainingBand& band : sn.bands) {
    for (std::size_t e = band.begin; e < band.end; ++e) {
      columns(static_cast<Eigen::Index>(e), 1) = gradient_along(layout_, band, line.gradients[e], scale.direction);
    }
  }
  // What the unknowns cannot follow of the flux's change along the direction.
  const Locals& by_unknowns = line.model.by_unknowns;
  const Eigen::MatrixXd weighted_unknowns = apply_inverse(sn, line.noise, line.model.flux, by_unknowns);
  columns.col(1) -= by_unknowns * (covariance * (weighted_unknowns.transpose() * columns.col(1)));
  const Eigen::MatrixXd weighted = apply_inverse(sn, line.noise, line.model.flux, columns);
  for (const TrainingBand& band : sn.bands) {
    for (std::size_t e = band.begin; e < band.end; ++e) {
      const auto row = static_cast<Eigen::Index>(e);
      add_gradient(layout_, band, line.gradients[e], weighted(row, 0), into.data);
      add_gradient(layout_, band, line.gradients[e], weighted(row, 1), into.curvature);
    }
  }
  add_spread_slope(layout_, sn, line, covariance, into.spread);
  into.time_scale_cost += time_scale_cost(covariance(2, 2), trainer_.prior);
}

}  // namespace thirdrung
