#include "training/normal_equations.h"

#include <Eigen/Cholesky>
#include <algorithm>
#include <cmath>

#include "base/parallel.h"
#include "training/spread_terms.h"

namespace thirdrung {

namespace {

/// Supernovae are summed in this many fixed groups, in order, whatever the number of threads.
constexpr std::size_t group_count = 4;
/// Vectors of the rank-deficient parts are collected and subtracted this many at a time.
constexpr Eigen::Index batch_width = 192;

/// Collects vectors v and subtracts Σ v v^T from a symmetric matrix in blocks, where a matrix product is fast.
class RankUpdates {
 public:
  explicit RankUpdates(Eigen::MatrixXd& target) : target_(target), batch_(target.rows(), batch_width) {}
  ~RankUpdates() { flush(); }
  RankUpdates(const RankUpdates&) = delete;
  RankUpdates& operator=(const RankUpdates&) = delete;

  void subtract(const Eigen::Ref<const Eigen::VectorXd>& v) {
    batch_.col(used_++) = v;
    if (used_ == batch_width) flush();
  }

 private:
  void flush() {
    if (used_ > 0) target_.selfadjointView<Eigen::Lower>().rankUpdate(batch_.leftCols(used_), -1.0);
    used_ = 0;
  }

  Eigen::MatrixXd& target_;
  Eigen::MatrixXd batch_;
  Eigen::Index used_ = 0;
};

struct Block {
  int first;
  const double* wavelength;
  int count;
  double phase;
};

/// Adds weight × j j^T to the lower triangle, j the gradient of one epoch.
void add_epoch(const CoefficientLayout& layout, const TrainingBand& band, const EpochGradient& g, double weight,
               Eigen::MatrixXd& hessian) {
  std::array<Block, 9> blocks{};
  for (int i = 0; i < 4; ++i) {
    const auto k = static_cast<std::size_t>(i);
    blocks[k] = {layout.phi(g.phi_phase.first + i, band.phi_first), g.phi.data(), band.phi_count, g.phi_phase.value[k]};
    blocks[k + 4] = {layout.gamma(g.gamma_phase.first + i, band.gamma_first), g.gamma.data(), band.gamma_count,
                     g.gamma_phase.value[k]};
  }
  blocks[8] = {layout.colour(band.colour_first), g.colour.data(), band.colour_count, 1.0};
  for (std::size_t a = 0; a < blocks.size(); ++a) {
    for (std::size_t b = 0; b <= a; ++b) {
      const double scale = weight * blocks[a].phase * blocks[b].phase;
      if (scale == 0.0) continue;
      for (int j = 0; j < blocks[b].count; ++j) {
        const double column_value = scale * blocks[b].wavelength[j];
        double* column = &hessian(blocks[a].first, blocks[b].first + j);
        const int start = a == b ? j : 0;
        for (int i = start; i < blocks[a].count; ++i) column[i] += column_value * blocks[a].wavelength[i];
      }
    }
  }
}

EliminatedSupernova eliminate(const CoefficientLayout& layout, const TrainingSupernova& sn, const SupernovaUnknowns& at,
                              const LinearisedSupernova& line, const UnknownsPrior& prior, NormalEquations& into,
                              RankUpdates& updates) {
  EliminatedSupernova out;
  const Eigen::MatrixXd weighted = apply_inverse(sn, line.noise, line.model.flux, line.model.by_unknowns);
  Eigen::Matrix4d local = line.model.by_unknowns.transpose() * weighted;
  out.local_gradient = weighted.transpose() * line.residual;
  local(2, 2) += 1 / (prior.s_width * prior.s_width);
  local(3, 3) += 1 / (prior.c_width * prior.c_width);
  out.local_gradient(2) += (prior.s_mean - at.s) / (prior.s_width * prior.s_width);
  out.local_gradient(3) += (prior.c_mean - at.c) / (prior.c_width * prior.c_width);

  const Eigen::VectorXd weighted_residual = apply_inverse(sn, line.noise, line.model.flux, line.residual);
  out.cross = Eigen::MatrixXd::Zero(layout.size(), 4);
  for (std::size_t b = 0; b < sn.bands.size(); ++b) {
    const TrainingBand& band = sn.bands[b];
    Eigen::VectorXd common = Eigen::VectorXd::Zero(layout.size());
    double coupling = 0;
    for (std::size_t e = band.begin; e < band.end; ++e) {
      const auto row = static_cast<Eigen::Index>(e);
      const EpochGradient& g = line.gradients[e];
      add_epoch(layout, band, g, 1 / line.noise.variance(row), into.hessian);
      add_gradient(layout, band, g, weighted_residual(row), into.gradient);
      for (int k = 0; k < 4; ++k) add_gradient(layout, band, g, weighted(row, k), out.cross.col(k));
      const double v = line.model.flux(row) / line.noise.variance(row);
      add_gradient(layout, band, g, v, common);
      coupling += v * line.model.flux(row);
    }
    const double square = line.noise.colour_scatter[b] * line.noise.colour_scatter[b];
    updates.subtract(std::sqrt(square / (1 + square * coupling)) * common);
  }
  const Eigen::LLT<Eigen::Matrix4d> factor(local);
  out.local_inverse = factor.solve(Eigen::Matrix4d::Identity());
  const Eigen::MatrixXd half = factor.matrixL().solve(out.cross.transpose()).transpose();
  for (Eigen::Index k = 0; k < 4; ++k) updates.subtract(half.col(k));
  into.gradient -= out.cross * (out.local_inverse * out.local_gradient);
  return out;
}

}  // namespace

LinearisedSupernova linearise(const SpectralTemplate& model, const TrainingSupernova& sn, const SupernovaUnknowns& at,
                              const Eigen::VectorXd& robust_weight) {
  LinearisedSupernova out;
  out.model = evaluate_supernova(model, sn, at, &out.gradients);
  out.noise = supernova_noise(model, sn, at, out.model.flux, robust_weight);
  out.residual.resize(out.model.flux.size());
  for (std::size_t e = 0; e < sn.epochs.size(); ++e) {
    out.residual(static_cast<Eigen::Index>(e)) = sn.epochs[e].flux - out.model.flux(static_cast<Eigen::Index>(e));
  }
  return out;
}

NormalEquations eliminate_supernovae(const SpectralTemplate& model, std::span<const TrainingSupernova> supernovae,
                                     std::span<const SupernovaUnknowns> unknowns,
                                     std::span<const Eigen::VectorXd> robust_weights, const UnknownsPrior& prior,
                                     int threads, std::vector<EliminatedSupernova>& eliminated) {
  const CoefficientLayout layout(model);
  eliminated.resize(supernovae.size());
  std::vector<NormalEquations> groups(group_count, NormalEquations(layout.size()));
  parallel_for(group_count, threads, [&](std::size_t group) {
    RankUpdates updates(groups[group].hessian);
    // Every group takes each fourth supernova, so that surveys, and with them the cost, are spread evenly.
    for (std::size_t k = group; k < supernovae.size(); k += group_count) {
      const LinearisedSupernova line = linearise(model, supernovae[k], unknowns[k], robust_weights[k]);
      eliminated[k] = eliminate(layout, supernovae[k], unknowns[k], line, prior, groups[group], updates);
      add_spread_slope(layout, supernovae[k], line, eliminated[k].local_inverse, groups[group].spread);
    }
  });
  for (std::size_t group = 1; group < group_count; ++group) groups.front().add(groups[group]);
  groups.front().gradient -= groups.front().spread;
  return std::move(groups.front());
}

double half_chi2(const TrainingSupernova& sn, const SupernovaNoise& noise, const Eigen::VectorXd& noise_flux,
                 const Eigen::VectorXd& residual, const SupernovaUnknowns& at, const UnknownsPrior& prior) {
  const double s_pull = (at.s - prior.s_mean) / prior.s_width;
  const double c_pull = (at.c - prior.c_mean) / prior.c_width;
  return 0.5 *
         (residual.dot(apply_inverse(sn, noise, noise_flux, residual).col(0)) + s_pull * s_pull + c_pull * c_pull);
}

}  // namespace thirdrung
