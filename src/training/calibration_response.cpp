#include "training/calibration_response.h"

#include <Eigen/Cholesky>
#include <algorithm>
#include <cmath>
#include <set>
#include <string>

#include "base/constants.h"
#include "base/parallel.h"
#include "base/progress.h"
#include "training/spread_terms.h"

namespace thirdrung {

namespace {

/// Change of the flux residuals of one band with its wavelength scale [uJy per angstrom], one an epoch of the
/// supernova.
Eigen::VectorXd wavelength_slope(const TrainingState& state, std::size_t k, const TrainingSupernova& sn,
                                 const TrainingBand& band, const Supernova& supernova,
                                 const PassbandCatalogue& catalogue, const std::optional<Spectrum>& standard_star,
                                 const Extinction& dust) {
  constexpr double shift = 5.0;  // angstrom
  const CalibratedPassband& calibrated = catalogue.at(band.passband);
  const CalibratedPassband moved = with_wavelength_shift(calibrated, shift, standard_star);
  // Tabulated magnitudes stay as they are: the flux they stand for follows the system's zero in the moved passband.
  const double data_factor = std::pow(10.0, -0.4 * (moved.ab_magnitude_of_zero - calibrated.ab_magnitude_of_zero));
  TrainingSupernova shifted;
  shifted.z_helio = sn.z_helio;
  const double ebv = std::isfinite(supernova.mw_ebv) ? supernova.mw_ebv : 0.0;
  TrainingBand copy =
      band_on_bases(band.passband, band_weights(moved.passband, sn.z_helio, dust, ebv, 10.0), state.model);
  copy.begin = 0;
  copy.end = band.end - band.begin;
  shifted.bands.push_back(std::move(copy));
  for (std::size_t e = band.begin; e < band.end; ++e) shifted.epochs.push_back(sn.epochs[e]);
  const Eigen::VectorXd model = evaluate_supernova(state.model, sn, state.unknowns[k]).flux;
  const Eigen::VectorXd model_moved = evaluate_supernova(state.model, shifted, state.unknowns[k]).flux;
  Eigen::VectorXd out = Eigen::VectorXd::Zero(static_cast<Eigen::Index>(sn.epochs.size()));
  for (std::size_t e = band.begin; e < band.end; ++e) {
    const auto row = static_cast<Eigen::Index>(e);
    const double of_model = model_moved(static_cast<Eigen::Index>(e - band.begin)) - model(row);
    out(row) = (sn.epochs[e].flux * (data_factor - 1) - of_model) / shift;
  }
  return out;
}

/// Minus the gradient of what the light curves say, in all coefficients, at templates near the optimum.
///
/// Unknowns, noise and robust weights of every supernova are settled at each, from where the last call left them.
class SettledGradient {
 public:
  SettledGradient(const TrainingState& state, const TrainerOptions& trainer)
      : unknowns_(state.unknowns), robust_weights_(state.robust_weights), trainer_(trainer) {}

  Eigen::VectorXd at(const SpectralTemplate& model, std::span<const TrainingSupernova> supernovae) {
    constexpr std::size_t groups = 4;  // Summed in order, whatever the number of threads.
    const CoefficientLayout layout(model);
    std::vector<Eigen::VectorXd> sums(groups, Eigen::VectorXd::Zero(layout.size()));
    parallel_for(groups, trainer_.threads, [&](std::size_t group) {
      for (std::size_t k = group; k < supernovae.size(); k += groups) {
        add(layout, model, supernovae[k], unknowns_[k], robust_weights_[k], sums[group]);
      }
    });
    for (std::size_t group = 1; group < groups; ++group) sums.front() += sums[group];
    return sums.front();
  }

 private:
  void add(const CoefficientLayout& layout, const SpectralTemplate& model, const TrainingSupernova& sn,
           SupernovaUnknowns& at, Eigen::VectorXd& weight, Eigen::VectorXd& into) const {
    const Eigen::Matrix4d covariance = fit_supernova(model, sn, trainer_.prior, trainer_.robust_degrees, at, weight);
    const LinearisedSupernova line = linearise(model, sn, at, weight);
    const Eigen::VectorXd weighted = apply_inverse(sn, line.noise, line.model.flux, line.residual).col(0);
    Eigen::VectorXd slope = Eigen::VectorXd::Zero(layout.size());
    for (const TrainingBand& band : sn.bands) {
      for (std::size_t e = band.begin; e < band.end; ++e) {
        add_gradient(layout, band, line.gradients[e], weighted(static_cast<Eigen::Index>(e)), into);
      }
    }
    add_spread_slope(layout, sn, line, covariance, slope);
    into -= slope;
  }

  std::vector<SupernovaUnknowns> unknowns_;
  std::vector<Eigen::VectorXd> robust_weights_;
  const TrainerOptions& trainer_;
};

enum class Calibration { zero_point, wavelength };

/// The training set with the calibration of one passband moved by `step`.
std::vector<TrainingSupernova> moved_data(const TrainingState& state, std::span<const TrainingSupernova> supernovae,
                                          std::span<const TrainingCandidate> candidates,
                                          std::span<const std::size_t> candidate_of, const PassbandCatalogue& catalogue,
                                          const std::optional<Spectrum>& standard_star, const Extinction& dust,
                                          const std::string& passband, Calibration what, double step, int threads) {
  std::vector<TrainingSupernova> out(supernovae.begin(), supernovae.end());
  parallel_for(out.size(), threads, [&](std::size_t k) {
    TrainingSupernova& sn = out[k];
    for (const TrainingBand& band : sn.bands) {
      if (band.passband != passband) continue;
      if (what == Calibration::zero_point) {
        const double factor = 1 - constants::ln_flux_per_mag * step;
        for (std::size_t e = band.begin; e < band.end; ++e) {
          sn.epochs[e].flux *= factor;
          sn.epochs[e].flux_error *= factor;
        }
        continue;
      }
      const Eigen::VectorXd slope = wavelength_slope(
          state, k, supernovae[k], band, candidates[candidate_of[k]].supernova, catalogue, standard_star, dust);
      for (std::size_t e = band.begin; e < band.end; ++e) {
        sn.epochs[e].flux += step * slope(static_cast<Eigen::Index>(e));
      }
    }
  });
  return out;
}

}  // namespace

std::vector<CalibrationResponse> calibration_responses(
    const TrainingState& state, std::span<const TrainingSupernova> supernovae,
    std::span<const TrainingCandidate> candidates, std::span<const std::size_t> candidate_of,
    const PassbandCatalogue& catalogue, const std::optional<Spectrum>& standard_star, const Extinction& dust,
    const NormalEquations& system, const TrainerOptions& trainer, const ResponseOptions& options) {
  std::set<std::string> passbands;
  for (const TrainingSupernova& sn : supernovae) {
    for (const TrainingBand& band : sn.bands) passbands.insert(band.passband);
  }
  const CoefficientLayout layout(state.model);
  const Eigen::VectorXd start = layout.gather(state.model);
  TrainingState held = state;
  const Eigen::LLT<Eigen::MatrixXd> factor(system.hessian.selfadjointView<Eigen::Lower>());
  NormalEquations fixed(layout.size());
  add_spectra_and_smoothness(held, trainer, fixed);
  add_gauge(held.model, trainer.gauge_error, fixed);
  SettledGradient settled(state, trainer);
  const Eigen::VectorXd at_optimum = settled.at(state.model, supernovae);

  Progress progress("Responses to calibration", 2 * passbands.size());
  const auto response = [&](const std::string& passband, Calibration what, double step) {
    const std::vector<TrainingSupernova> moved = moved_data(state, supernovae, candidates, candidate_of, catalogue,
                                                            standard_star, dust, passband, what, step, trainer.threads);
    SettledGradient gradient = settled;
    Eigen::VectorXd reached = Eigen::VectorXd::Zero(layout.size());
    for (int correction = 0; correction <= options.corrections; ++correction) {
      SpectralTemplate model = state.model;
      layout.scatter(start + reached, model);
      const Eigen::VectorXd left =
          gradient.at(model, moved) - at_optimum - fixed.hessian.selfadjointView<Eigen::Lower>() * reached;
      reached += factor.solve(left);
    }
    progress.advance();
    return Eigen::VectorXd(reached / step);
  };
  std::vector<CalibrationResponse> out;
  out.reserve(passbands.size());
  for (const std::string& passband : passbands) {
    out.push_back({passband, response(passband, Calibration::zero_point, options.zero_point_step),
                   response(passband, Calibration::wavelength, options.wavelength_step)});
  }
  return out;
}

}  // namespace thirdrung
