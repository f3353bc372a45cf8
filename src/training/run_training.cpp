#include "training/run_training.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <limits>
#include <map>
#include <set>

#include "base/progress.h"
#include "training/calibration_response.h"

namespace thirdrung {

namespace {

/// A state without the supernovae of one fold, to be trained on from where the whole stands.
struct Fold {
  TrainingState state;
  std::vector<TrainingSupernova> supernovae;
};

Fold without_fold(const TrainingResult& result, int fold, int folds) {
  Fold out;
  out.state.model = result.state.model;
  out.state.spectra = result.state.spectra;
  out.state.spectra_scatter = result.state.spectra_scatter;
  for (std::size_t k = 0; k < result.selection.supernovae.size(); ++k) {
    if (fold_of(k, folds) == fold) continue;
    out.supernovae.push_back(result.selection.supernovae[k]);
    out.state.unknowns.push_back(result.state.unknowns[k]);
    out.state.robust_weights.push_back(result.state.robust_weights[k]);
  }
  return out;
}

void append(LightCurveFits& into, LightCurveFits&& fits) {
  std::move(fits.fits.begin(), fits.fits.end(), std::back_inserter(into.fits));
  std::move(fits.set_aside.begin(), fits.set_aside.end(), std::back_inserter(into.set_aside));
}

/// A prior that is not as wide as the population changes the scale of what it is for (spread_terms.h).
void warn_of_width(const std::string& name, double prior, double found, std::vector<std::string>& warnings) {
  if (std::abs(prior / found - 1) < 0.1) return;
  warnings.push_back(fmt::format(
      "The prior takes {0} to spread by {1:.3f}, and the training set spreads by {2:.3f}: the scale of {0} comes out "
      "wrong. Train again with {0}_width = {2:.3f}.",
      name, prior, found));
}

/// Moves the mean of the prior of s until the mean of the population is where the prior's was.
///
/// The time scale is known from this prior alone, but not quite: the template's grid and its noise have a slope along
/// it too, and left the mean of s off by 0.4 of an error of one supernova (24 samples of the closure test).
void centre_stretches(TrainingState& state, std::span<const TrainingSupernova> supernovae, TrainerOptions& options) {
  constexpr double close_enough = 2e-4;
  constexpr int most_rounds = 8;
  const double wanted = options.prior.s_mean;
  TrainerOptions scatter_held = options;
  scatter_held.scatter_rounds = 0;
  for (int round = 0; round < most_rounds; ++round) {
    const double off = population_of(state, supernovae, options.threads).s.mean - wanted;
    state.log.push_back(fmt::format("mean of s off by {:+.5f}", off));
    if (std::abs(off) < close_enough) return;
    options.prior.s_mean -= off;
    scatter_held.prior.s_mean = options.prior.s_mean;
    train(state, supernovae, scatter_held);
  }
}

std::vector<TrainingCandidate> chosen_of(std::span<const TrainingCandidate> candidates,
                                         std::span<const std::size_t> chosen) {
  std::vector<TrainingCandidate> out;
  for (const std::size_t i : chosen) out.push_back(candidates[i]);
  return out;
}

void fit_out_of_fold(TrainingResult& result, std::span<const TrainingCandidate> candidates,
                     const PassbandCatalogue& catalogue, const Extinction& dust, const TrainingSetup& setup,
                     TrainerOptions options) {
  const int folds = setup.cross_validation.folds;
  options.scatter_rounds = 1;
  options.iterations = 4;
  std::set<std::size_t> never_seen;
  for (std::size_t i = 0; i < candidates.size(); ++i) never_seen.insert(i);
  Progress progress("Templates of the folds", static_cast<std::size_t>(folds));
  for (int fold = 0; fold < folds; ++fold) {
    Fold part = without_fold(result, fold, folds);
    train(part.state, part.supernovae, options);
    std::vector<std::size_t> held_out;
    for (std::size_t k = 0; k < result.selection.supernovae.size(); ++k) {
      if (fold_of(k, folds) != fold) continue;
      held_out.push_back(result.selection.candidate[k]);
      never_seen.erase(held_out.back());
    }
    append(result.out_of_fold,
           fit_candidates(chosen_of(candidates, held_out), part.state.model, catalogue, dust, setup));
    result.fold_templates.push_back(std::move(part.state.model));
    progress.advance();
  }
  const std::vector<std::size_t> rest(never_seen.begin(), never_seen.end());
  append(result.out_of_fold, fit_candidates(chosen_of(candidates, rest), result.state.model, catalogue, dust, setup));
}

}  // namespace

std::vector<std::string> training_set_warnings(std::span<const TrainingSupernova> supernovae) {
  std::vector<std::string> out;
  std::set<std::string> surveys;
  double z_low = std::numeric_limits<double>::infinity();
  double z_high = 0;
  double blue = std::numeric_limits<double>::infinity();
  double red = 0;
  for (const TrainingSupernova& sn : supernovae) {
    surveys.insert(sn.survey);
    z_low = std::min(z_low, sn.z_helio);
    z_high = std::max(z_high, sn.z_helio);
    for (const TrainingBand& band : sn.bands) {
      blue = std::min(blue, band.weights.mean_wavelength);
      red = std::max(red, band.weights.mean_wavelength);
    }
  }
  if (supernovae.size() < 50) {
    out.push_back(
        fmt::format("Only {} supernovae: stretch response and scatter are barely determined.", supernovae.size()));
  }
  if (surveys.size() < 2)
    out.push_back("One survey only: its zero points and passbands cannot be told from the template.");
  if (z_high - z_low < 0.05) {
    out.push_back(fmt::format(
        "Redshifts span only {:.3f}: the spectrum between the bands' wavelengths is undetermined.", z_high - z_low));
  }
  if (blue > 4400) {
    out.push_back(fmt::format(
        "No band bluer than {:.0f} angstrom in the rest frame: B magnitude and colour rest on extrapolation.", blue));
  }
  if (red < 6000) {
    out.push_back(fmt::format(
        "No band redder than {:.0f} angstrom in the rest frame: the red half of the template is undetermined.", red));
  }
  return out;
}

TrainingResult run_training(std::span<const TrainingCandidate> candidates, std::vector<TrainingSpectrum> spectra,
                            const PassbandCatalogue& catalogue, const std::optional<Spectrum>& standard_star,
                            const Extinction& dust, const TrainingSetup& setup) {
  TrainingResult result;
  TrainerOptions options = setup.trainer;
  const SpectralTemplate start = start_template(setup.bases, catalogue, setup.gauge_b, setup.gauge_v);
  result.selection = select_supernovae(candidates, start, catalogue, dust, setup.cuts, options);
  result.warnings = training_set_warnings(result.selection.supernovae);
  result.state = result.selection.state;
  result.state.spectra = std::move(spectra);
  const auto& supernovae = result.selection.supernovae;
  if (supernovae.size() < 10) {
    throw NoResultError(
        fmt::format("Only {} supernovae are left to train on: a template needs at least ten, and hundreds to be good.",
                    supernovae.size()));
  }
  if (setup.choose_smoothing) {
    TrainerOptions first = options;
    first.scatter_rounds = 2;
    train(result.state, supernovae, first);
    result.cross_validation = cross_validate(result.state, supernovae, options, setup.cross_validation);
    options.smoothness = result.cross_validation.best;
  }
  result.smoothness = options.smoothness;
  result.folds = setup.cross_validation.folds;
  train(result.state, supernovae, options);
  centre_stretches(result.state, supernovae, options);
  result.log = result.state.log;
  result.population = population_of(result.state, supernovae, options.threads);
  warn_of_width("s", options.prior.s_width, result.population.s.width, result.warnings);
  warn_of_width("c", options.prior.c_width, result.population.c.width, result.warnings);

  std::vector<EliminatedSupernova> eliminated;
  const NormalEquations system = assemble(result.state, supernovae, options, eliminated);
  TemplateUncertainty uncertainty = template_uncertainty(result.state.model, system, setup.covariance_modes);
  result.trained.responses = calibration_responses(result.state, supernovae, candidates, result.selection.candidate,
                                                   catalogue, standard_star, dust, system, options);
  result.trained.covariance_modes = std::move(uncertainty.modes);
  result.covariance = std::move(uncertainty.covariance);
  result.offsets = zero_point_offsets(
      result.state.model, supernovae, result.state.unknowns, result.state.robust_weights, options.prior,
      [](const std::string&) { return 0.1; }, options.threads);
  result.error_factors = error_factors(result.state.model, supernovae, result.state.unknowns, options.prior,
                                       TemplateScatter::estimated_along, options.scatter, options.threads);
  if (setup.out_of_fold) fit_out_of_fold(result, candidates, catalogue, dust, setup, options);
  result.trained.model = result.state.model;
  result.trained.model.name = setup.name;
  return result;
}

}  // namespace thirdrung
