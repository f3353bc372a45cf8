#pragma once

#include <Eigen/Dense>
#include <cmath>

#include "training/scatter_fit.h"
#include "training/small_training.h"

namespace thirdrung::testing {

/// The restricted log-likelihood with its prior, from full matrices (Patterson & Thompson 1971, Biometrika 58, 545),
/// without the constant of 2π.
inline double restricted_log_likelihood(const SpectralTemplate& model, const PreparedTraining& set,
                                        const UnknownsPrior& prior, const ScatterOptions& options) {
  double out = 0;
  for (std::size_t k = 0; k < set.supernovae.size(); ++k) {
    const TrainingSupernova& sn = set.supernovae[k];
    const SupernovaModel values = evaluate_supernova(model, sn, set.unknowns[k]);
    const auto n = values.flux.size();
    // Data and the two priors as one list of observations of the four unknowns.
    Eigen::MatrixXd design = Eigen::MatrixXd::Zero(n + 2, 4);
    design.topRows(n) = values.by_unknowns;
    design(n, 2) = 1;
    design(n + 1, 3) = 1;
    Eigen::VectorXd residual(n + 2);
    Eigen::MatrixXd covariance = Eigen::MatrixXd::Zero(n + 2, n + 2);
    for (const TrainingBand& band : sn.bands) {
      Eigen::VectorXd common = Eigen::VectorXd::Zero(n + 2);
      for (std::size_t e = band.begin; e < band.end; ++e) {
        const auto row = static_cast<Eigen::Index>(e);
        const double phase = (sn.epochs[e].mjd - set.unknowns[k].t_0) / (1 + sn.z_helio);
        const double own = model.epoch_scatter(phase, band.weights.mean_wavelength) * values.flux(row);
        covariance(row, row) = sn.epochs[e].flux_error * sn.epochs[e].flux_error + own * own;
        common(row) = model.colour_scatter(band.weights.mean_wavelength) * values.flux(row);
        residual(row) = sn.epochs[e].flux - values.flux(row);
      }
      covariance += common * common.transpose();
    }
    covariance(n, n) = prior.s_width * prior.s_width;
    covariance(n + 1, n + 1) = prior.c_width * prior.c_width;
    residual(n) = prior.s_mean - set.unknowns[k].s;
    residual(n + 1) = prior.c_mean - set.unknowns[k].c;
    const Eigen::MatrixXd inverse = covariance.inverse();
    const Eigen::Matrix4d normal = design.transpose() * inverse * design;
    const Eigen::Vector4d best = normal.inverse() * (design.transpose() * inverse * residual);
    const Eigen::VectorXd left = residual - design * best;
    const double log_det = 2 * Eigen::LLT<Eigen::MatrixXd>(covariance).matrixLLT().diagonal().array().log().sum();
    // The priors' own variances do not depend on the scatter.
    const double constant = 2 * std::log(prior.s_width) + 2 * std::log(prior.c_width);
    out -= 0.5 * (left.dot(inverse * left) + log_det - constant + std::log(normal.determinant()));
  }
  const auto pull = [](double x, double width) { return 0.5 * x * x / (width * width); };
  const Eigen::MatrixXd& e = model.log_epoch_scatter;
  for (Eigen::Index i = 0; i < e.rows(); ++i) {
    for (Eigen::Index j = 0; j < e.cols(); ++j) {
      out -= pull(e(i, j) - std::log(0.04), options.level_width);
      if (i + 1 < e.rows()) out -= pull(e(i, j) - e(i + 1, j), options.neighbour_width);
      if (j + 1 < e.cols()) out -= pull(e(i, j) - e(i, j + 1), options.neighbour_width);
    }
  }
  const Eigen::VectorXd& c = model.log_colour_scatter;
  for (Eigen::Index i = 0; i < c.size(); ++i) {
    out -= pull(c(i) - std::log(0.03), options.level_width);
    if (i + 1 < c.size()) out -= pull(c(i) - c(i + 1), options.neighbour_width);
  }
  return out;
}

}  // namespace thirdrung::testing
