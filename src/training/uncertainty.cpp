#include "training/uncertainty.h"

#include <Eigen/Cholesky>
#include <Eigen/Eigenvalues>
#include <algorithm>
#include <cmath>
#include <map>
#include <set>

#include "base/constants.h"
#include "base/parallel.h"

namespace thirdrung {

namespace {

/// Change of the flux residuals of one band with its calibration, per magnitude and per angstrom.
struct ResidualSlopes {
  Eigen::VectorXd zero_point, wavelength;
};

ResidualSlopes residual_slopes(const TrainingState& state, std::size_t k, const TrainingSupernova& sn,
                               const TrainingBand& band, const Supernova& supernova, const PassbandCatalogue& catalogue,
                               const std::optional<Spectrum>& standard_star, const Extinction& dust,
                               const SpectralTemplate& bases) {
  constexpr double shift = 5.0;  // angstrom
  const auto n = static_cast<Eigen::Index>(sn.epochs.size());
  ResidualSlopes out{Eigen::VectorXd::Zero(n), Eigen::VectorXd::Zero(n)};
  const CalibratedPassband& calibrated = catalogue.at(band.passband);
  const CalibratedPassband moved = with_wavelength_shift(calibrated, shift, standard_star);
  // Tabulated magnitudes stay as they are: the flux they stand for follows the system's zero in the moved passband.
  const double data_factor = std::pow(10.0, -0.4 * (moved.ab_magnitude_of_zero - calibrated.ab_magnitude_of_zero));
  TrainingSupernova shifted;
  shifted.z_helio = sn.z_helio;
  const double ebv = std::isfinite(supernova.mw_ebv) ? supernova.mw_ebv : 0.0;
  TrainingBand copy = band_on_bases(band.passband, band_weights(moved.passband, sn.z_helio, dust, ebv, 10.0), bases);
  copy.begin = 0;
  copy.end = band.end - band.begin;
  shifted.bands.push_back(std::move(copy));
  for (std::size_t e = band.begin; e < band.end; ++e) shifted.epochs.push_back(sn.epochs[e]);
  const Eigen::VectorXd model = evaluate_supernova(state.model, sn, state.unknowns[k]).flux;
  const Eigen::VectorXd model_moved = evaluate_supernova(state.model, shifted, state.unknowns[k]).flux;
  for (std::size_t e = band.begin; e < band.end; ++e) {
    const auto row = static_cast<Eigen::Index>(e);
    const double flux = sn.epochs[e].flux;
    out.zero_point(row) = -constants::ln_flux_per_mag * flux;
    out.wavelength(row) =
        (flux * (data_factor - 1) - (model_moved(static_cast<Eigen::Index>(e - band.begin)) - model(row))) / shift;
  }
  return out;
}

}  // namespace

TemplateUncertainty template_uncertainty(const NormalEquations& system, int mode_count) {
  const auto n = system.hessian.rows();
  TemplateUncertainty out;
  const Eigen::LLT<Eigen::MatrixXd> factor(system.hessian.selfadjointView<Eigen::Lower>());
  out.covariance = factor.solve(Eigen::MatrixXd::Identity(n, n));
  out.covariance = 0.5 * (out.covariance + out.covariance.transpose().eval());
  const Eigen::VectorXd sigma = out.covariance.diagonal().cwiseSqrt();
  const Eigen::MatrixXd correlation =
      sigma.cwiseInverse().asDiagonal() * out.covariance * sigma.cwiseInverse().asDiagonal();
  const Eigen::SelfAdjointEigenSolver<Eigen::MatrixXd> eigen(correlation);
  const auto count = std::min<Eigen::Index>(mode_count, n);
  out.modes = sigma.asDiagonal() * eigen.eigenvectors().rightCols(count) *
              eigen.eigenvalues().tail(count).cwiseMax(0.0).cwiseSqrt().asDiagonal();
  return out;
}

std::vector<CalibrationResponse> calibration_responses(
    const TrainingState& state, std::span<const TrainingSupernova> supernovae,
    std::span<const TrainingCandidate> candidates, std::span<const std::size_t> candidate_of,
    const PassbandCatalogue& catalogue, const std::optional<Spectrum>& standard_star, const Extinction& dust,
    const NormalEquations& system, std::span<const EliminatedSupernova> eliminated, int threads) {
  std::set<std::string> names;
  for (const TrainingSupernova& sn : supernovae) {
    for (const TrainingBand& band : sn.bands) names.insert(band.passband);
  }
  const std::vector<std::string> passbands(names.begin(), names.end());
  const CoefficientLayout layout(state.model);
  const auto n = layout.size();
  // Column 2b: zero point of passband b; 2b + 1: its wavelength. One matrix a group of supernovae, added in order.
  constexpr std::size_t groups = 4;
  const auto columns = static_cast<Eigen::Index>(2 * passbands.size());
  std::vector<Eigen::MatrixXd> gradient(groups, Eigen::MatrixXd::Zero(n, columns));
  parallel_for(groups, threads, [&](std::size_t group) {
    for (std::size_t k = group; k < supernovae.size(); k += groups) {
      const TrainingSupernova& sn = supernovae[k];
      const LinearisedSupernova line = linearise(state.model, sn, state.unknowns[k], state.robust_weights[k]);
      for (const TrainingBand& band : sn.bands) {
        const auto b = std::lower_bound(passbands.begin(), passbands.end(), band.passband) - passbands.begin();
        const ResidualSlopes slopes = residual_slopes(state, k, sn, band, candidates[candidate_of[k]].supernova,
                                                      catalogue, standard_star, dust, state.model);
        for (int kind = 0; kind < 2; ++kind) {
          const Eigen::VectorXd weighted =
              apply_inverse(sn, line.noise, line.model.flux, kind == 0 ? slopes.zero_point : slopes.wavelength).col(0);
          auto column = gradient[group].col(2 * b + kind);
          for (std::size_t e = band.begin; e < band.end; ++e) {
            add_gradient(layout, band, line.gradients[e], weighted(static_cast<Eigen::Index>(e)), column);
          }
          const Eigen::Vector4d local = line.model.by_unknowns.transpose() * weighted;
          column -= eliminated[k].cross * (eliminated[k].local_inverse * local);
        }
      }
    }
  });
  for (std::size_t group = 1; group < groups; ++group) gradient.front() += gradient[group];
  const Eigen::LLT<Eigen::MatrixXd> factor(system.hessian.selfadjointView<Eigen::Lower>());
  const Eigen::MatrixXd response = factor.solve(gradient.front());
  std::vector<CalibrationResponse> out;
  for (std::size_t b = 0; b < passbands.size(); ++b) {
    const auto column = static_cast<Eigen::Index>(2 * b);
    out.push_back({passbands[b], response.col(column), response.col(column + 1)});
  }
  return out;
}

}  // namespace thirdrung
