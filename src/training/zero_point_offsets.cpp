#include "training/zero_point_offsets.h"

#include <Eigen/Cholesky>
#include <map>

#include "base/constants.h"
#include "base/parallel.h"

namespace thirdrung {

namespace {

/// Normal equations of one supernova's bands in their offsets, its own unknowns eliminated.
struct BandSystem {
  Eigen::MatrixXd hessian;
  Eigen::VectorXd gradient;
};

BandSystem band_system(const SpectralTemplate& model, const TrainingSupernova& sn, const SupernovaUnknowns& at,
                       const Eigen::VectorXd& weight, const UnknownsPrior& prior) {
  const SupernovaModel values = evaluate_supernova(model, sn, at);
  const SupernovaNoise noise = supernova_noise(model, sn, at, values.flux, weight);
  const auto n = values.flux.size();
  const auto bands = static_cast<Eigen::Index>(sn.bands.size());
  Eigen::VectorXd residual(n);
  // An offset o makes the data fainter by 0.921 o f: the residual's slope is −0.921 f, so J = +0.921 f for data − J o.
  Eigen::MatrixXd design = Eigen::MatrixXd::Zero(n, bands + 4);
  for (Eigen::Index b = 0; b < bands; ++b) {
    const TrainingBand& band = sn.bands[static_cast<std::size_t>(b)];
    for (std::size_t e = band.begin; e < band.end; ++e) {
      const auto row = static_cast<Eigen::Index>(e);
      residual(row) = sn.epochs[e].flux - values.flux(row);
      design(row, b) = constants::ln_flux_per_mag * values.flux(row);
    }
  }
  design.rightCols(4) = values.by_unknowns;
  const Eigen::MatrixXd weighted = apply_inverse(sn, noise, values.flux, design);
  Eigen::MatrixXd normal = design.transpose() * weighted;
  Eigen::VectorXd gradient = weighted.transpose() * residual;
  normal(bands + 2, bands + 2) += 1 / (prior.s_width * prior.s_width);
  normal(bands + 3, bands + 3) += 1 / (prior.c_width * prior.c_width);
  gradient(bands + 2) += (prior.s_mean - at.s) / (prior.s_width * prior.s_width);
  gradient(bands + 3) += (prior.c_mean - at.c) / (prior.c_width * prior.c_width);
  const Eigen::LLT<Eigen::Matrix4d> local(Eigen::Matrix4d(normal.bottomRightCorner<4, 4>()));
  const Eigen::MatrixXd cross = normal.topRightCorner(bands, 4);
  return {normal.topLeftCorner(bands, bands) - cross * local.solve(cross.transpose()),
          gradient.head(bands) - cross * local.solve(Eigen::Vector4d(gradient.tail(4)))};
}

}  // namespace

std::vector<ZeroPointOffset> zero_point_offsets(
    const SpectralTemplate& model, std::span<const TrainingSupernova> supernovae,
    std::span<const SupernovaUnknowns> unknowns, std::span<const Eigen::VectorXd> robust_weights,
    const UnknownsPrior& prior, const std::function<double(const std::string&)>& prior_width, int threads) {
  std::map<std::pair<std::string, std::string>, int> count;
  for (const TrainingSupernova& sn : supernovae) {
    for (const TrainingBand& band : sn.bands) ++count[{sn.survey, band.passband}];
  }
  std::vector<ZeroPointOffset> out;
  std::map<std::pair<std::string, std::string>, Eigen::Index> index;
  for (const auto& [key, n] : count) {
    index[key] = static_cast<Eigen::Index>(out.size());
    out.push_back({key.first, key.second, 0, 0, n});
  }
  std::vector<BandSystem> systems(supernovae.size());
  parallel_for(supernovae.size(), threads, [&](std::size_t k) {
    systems[k] = band_system(model, supernovae[k], unknowns[k], robust_weights[k], prior);
  });
  const auto size = static_cast<Eigen::Index>(out.size());
  Eigen::MatrixXd hessian = Eigen::MatrixXd::Zero(size, size);
  for (Eigen::Index b = 0; b < size; ++b) {
    const double width = prior_width(out[static_cast<std::size_t>(b)].passband);
    hessian(b, b) = 1 / (width * width);
  }
  Eigen::VectorXd gradient = Eigen::VectorXd::Zero(size);
  for (std::size_t k = 0; k < supernovae.size(); ++k) {
    const auto& bands = supernovae[k].bands;
    for (std::size_t a = 0; a < bands.size(); ++a) {
      const Eigen::Index row = index.at({supernovae[k].survey, bands[a].passband});
      gradient(row) += systems[k].gradient(static_cast<Eigen::Index>(a));
      for (std::size_t b = 0; b < bands.size(); ++b) {
        const Eigen::Index col = index.at({supernovae[k].survey, bands[b].passband});
        hessian(row, col) += systems[k].hessian(static_cast<Eigen::Index>(a), static_cast<Eigen::Index>(b));
      }
    }
  }
  const Eigen::MatrixXd covariance = Eigen::LLT<Eigen::MatrixXd>(hessian).solve(Eigen::MatrixXd::Identity(size, size));
  const Eigen::VectorXd offset = covariance * gradient;
  for (std::size_t b = 0; b < out.size(); ++b) {
    out[b].offset = offset(static_cast<Eigen::Index>(b));
    out[b].error = std::sqrt(covariance(static_cast<Eigen::Index>(b), static_cast<Eigen::Index>(b)));
  }
  return out;
}

}  // namespace thirdrung
