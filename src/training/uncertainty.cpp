#include "training/uncertainty.h"

#include <Eigen/Cholesky>
#include <Eigen/Eigenvalues>
#include <algorithm>

#include "template/coefficients.h"

namespace thirdrung {

namespace {

/// Covariance of a Gaussian once the linear forms `given` are known.
Eigen::MatrixXd given_conventions(const Eigen::MatrixXd& covariance, const Eigen::MatrixXd& given) {
  const Eigen::MatrixXd cross = covariance * given;
  const Eigen::MatrixXd known = given.transpose() * cross;
  return covariance - cross * Eigen::LLT<Eigen::MatrixXd>(known).solve(cross.transpose());
}

}  // namespace

Eigen::VectorXd log_flux_gradient(const SpectralTemplate& model, const RestBand& band, double phase) {
  const CoefficientLayout layout(model);
  Eigen::VectorXd out = Eigen::VectorXd::Zero(layout.size());
  const auto phase_weights = model.phase_basis.at(phase);
  double all = 0;
  for (std::size_t j = 0; j < band.weight.size(); ++j) {
    if (band.weight[j] == 0.0) continue;
    const double photons = band.weight[j] * model.flux(phase, band.wavelength[j], 1, 0);
    const auto wave = model.wavelength_basis.at(band.wavelength[j]);
    for (int i = 0; i < 4; ++i) {
      for (int k = 0; k < 4; ++k) {
        out(layout.phi(phase_weights.first + i, wave.first + k)) +=
            photons * phase_weights.value[static_cast<std::size_t>(i)] * wave.value[static_cast<std::size_t>(k)];
      }
    }
    all += photons;
  }
  return out / all;
}

Eigen::MatrixXd convention_gradients(const SpectralTemplate& model) {
  const RestBand b = gauge_band_b(model);
  const Eigen::VectorXd b_at_maximum = log_flux_gradient(model, b, 0);
  Eigen::MatrixXd out(b_at_maximum.size(), 2);
  out.col(0) = log_flux_gradient(model, gauge_band_v(model), 0) - b_at_maximum;
  out.col(1) = log_flux_gradient(model, b, 15) - b_at_maximum;
  return out;
}

TemplateUncertainty template_uncertainty(const SpectralTemplate& model, const NormalEquations& system, int mode_count) {
  const auto n = system.hessian.rows();
  TemplateUncertainty out;
  const Eigen::LLT<Eigen::MatrixXd> factor(system.hessian.selfadjointView<Eigen::Lower>());
  out.covariance = factor.solve(Eigen::MatrixXd::Identity(n, n));
  out.covariance = 0.5 * (out.covariance + out.covariance.transpose().eval());
  const Eigen::MatrixXd conditional = given_conventions(out.covariance, convention_gradients(model));
  const Eigen::VectorXd sigma = conditional.diagonal().cwiseMax(1e-20).cwiseSqrt();
  const Eigen::MatrixXd correlation =
      sigma.cwiseInverse().asDiagonal() * conditional * sigma.cwiseInverse().asDiagonal();
  const Eigen::SelfAdjointEigenSolver<Eigen::MatrixXd> eigen(correlation);
  const auto count = std::min<Eigen::Index>(mode_count, n);
  out.modes = sigma.asDiagonal() * eigen.eigenvectors().rightCols(count) *
              eigen.eigenvalues().tail(count).cwiseMax(0.0).cwiseSqrt().asDiagonal();
  return out;
}

}  // namespace thirdrung
