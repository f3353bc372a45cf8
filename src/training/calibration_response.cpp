#include "training/calibration_response.h"

#include <cmath>
#include <set>
#include <string>

#include "base/constants.h"
#include "base/parallel.h"
#include "base/progress.h"
#include "training/gauged_step.h"
#include "training/settled_slope.h"

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
        const double factor = std::exp(-constants::ln_flux_per_mag * step);
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
  std::set<std::string> passbands(options.passbands.begin(), options.passbands.end());
  if (passbands.empty()) {
    for (const TrainingSupernova& sn : supernovae) {
      for (const TrainingBand& band : sn.bands) passbands.insert(band.passband);
    }
  }
  const CoefficientLayout layout(state.model);
  const Eigen::VectorXd start = layout.gather(state.model);
  const GaugedStep gauged(state.model, system, trainer.gauge_error);
  SettledSlope settled(state, trainer);
  // The trainer stops short of the last digit: what is left then belongs to no calibration.
  const Eigen::VectorXd at_optimum = settled.at(state.model, supernovae);
  const Eigen::VectorXd unfinished = at_optimum - gauged.from(state.model, at_optimum).held;

  Progress progress("Responses to calibration", 2 * passbands.size());
  const auto response = [&](const std::string& passband, Calibration what, double step) {
    const std::vector<TrainingSupernova> moved = moved_data(state, supernovae, candidates, candidate_of, catalogue,
                                                            standard_star, dust, passband, what, step, trainer.threads);
    SettledSlope slope = settled;
    Eigen::VectorXd reached = Eigen::VectorXd::Zero(layout.size());
    for (int correction = 0; correction <= options.corrections; ++correction) {
      SpectralTemplate model = state.model;
      layout.scatter(start + reached, model);
      reached += gauged.from(model, slope.at(model, moved) - unfinished).step;
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
