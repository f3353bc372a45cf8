#include "training/uncertainty.h"

#include <Eigen/Cholesky>
#include <Eigen/Eigenvalues>
#include <algorithm>

#include "template/coefficients.h"

namespace thirdrung {

namespace {

/// Gradient of ln flux in one band of the fiducial supernova, in all coefficients.
Eigen::VectorXd log_flux_gradient(const SpectralTemplate& model, const std::vector<double>& weight, double phase) {
  const CoefficientLayout layout(model);
  Eigen::VectorXd out = Eigen::VectorXd::Zero(layout.size());
  const auto phase_weights = model.phase_basis.at(phase);
  double all = 0;
  for (std::size_t j = 0; j < weight.size(); ++j) {
    if (weight[j] == 0.0) continue;
    const double photons = weight[j] * model.flux(phase, model.gauge_wavelength[j], 1, 0);
    const auto wave = model.wavelength_basis.at(model.gauge_wavelength[j]);
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

/// Columns: gradient of the fiducial B − V at maximum, and of its decline in B over 15 d, both in ln flux.
Eigen::MatrixXd convention_gradients(const SpectralTemplate& model) {
  const Eigen::VectorXd b = log_flux_gradient(model, model.gauge_weight_b, 0);
  Eigen::MatrixXd out(b.size(), 2);
  out.col(0) = log_flux_gradient(model, model.gauge_weight_v, 0) - b;
  out.col(1) = log_flux_gradient(model, model.gauge_weight_b, 15) - b;
  return out;
}

/// Covariance of a Gaussian once the linear forms `given` are known.
Eigen::MatrixXd given_conventions(const Eigen::MatrixXd& covariance, const Eigen::MatrixXd& given) {
  const Eigen::MatrixXd cross = covariance * given;
  const Eigen::MatrixXd known = given.transpose() * cross;
  return covariance - cross * Eigen::LLT<Eigen::MatrixXd>(known).solve(cross.transpose());
}

}  // namespace

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
