#include <cmath>
#include <map>

#include "base/parallel.h"
#include "training/error_factors.h"
#include "training/fitted_set.h"
#include "training/run_training.h"

namespace thirdrung {

namespace {

/// Candidates in the form that the fits take.
struct Inputs {
  std::vector<LightCurve> light_curves;
  std::vector<Supernova> supernovae;

  explicit Inputs(std::span<const TrainingCandidate> candidates) {
    for (const TrainingCandidate& candidate : candidates) {
      light_curves.push_back(candidate.light_curve);
      supernovae.push_back(candidate.supernova);
    }
  }
};

LightCurveFits fit_inputs(const Inputs& inputs, const SpectralTemplate& model, const PassbandCatalogue& catalogue,
                          const Extinction& dust, const TrainingSetup& setup) {
  return fit_all(inputs.light_curves, inputs.supernovae, PreparedTemplate(model), catalogue, dust, setup.fit,
                 setup.trainer.threads);
}

using Key = std::pair<std::string, std::string>;  ///< Survey and passband.

/// Those without a factor stay as they are.
void multiply(std::vector<LightCurve>& light_curves, const std::map<Key, double>& flux,
              const std::map<Key, double>& error) {
  for (LightCurve& light_curve : light_curves) {
    for (Epoch& epoch : light_curve.epochs) {
      const Key key{light_curve.survey, light_curve.passbands[epoch.passband]};
      if (const auto found = flux.find(key); found != flux.end()) epoch.flux *= found->second;
      if (const auto found = error.find(key); found != error.end()) epoch.flux_error *= found->second;
    }
  }
}

/// Error of a zero point that the catalogue does not state; common practice, no source.
constexpr double usual_zero_point_error = 0.02;

/// Within the errors of the zero points, and with priors of s and c too wide to count: what the light curves cannot
/// tell from stretches and colours of their own stays zero, instead of bringing every survey to the colour of the
/// training set.
std::vector<ZeroPointOffset> offsets_of(const FittedSet& set, const SpectralTemplate& model,
                                        const PassbandCatalogue& catalogue, const TrainerOptions& options) {
  constexpr UnknownsPrior wide{1, 100, 0, 100};
  std::vector<Eigen::VectorXd> weights;
  for (std::size_t k = 0; k < set.supernovae.size(); ++k)
    weights.push_back(robust_weights_of(model, set.supernovae[k], set.unknowns[k], options.robust_degrees));
  const auto width = [&](const std::string& passband) {
    const double stated = catalogue.at(passband).zero_point_error;
    return stated > 0 ? stated : usual_zero_point_error;
  };
  return zero_point_offsets(model, set.supernovae, set.unknowns, weights, wide, width, options.threads);
}

}  // namespace

LightCurveFits fit_candidates(std::span<const TrainingCandidate> candidates, const SpectralTemplate& model,
                              const PassbandCatalogue& catalogue, const Extinction& dust, const TrainingSetup& setup) {
  return fit_inputs(Inputs(candidates), model, catalogue, dust, setup);
}

CheckFits check_on_other_surveys(std::span<const TrainingCandidate> candidates, const SpectralTemplate& model,
                                 const PassbandCatalogue& catalogue, const Extinction& dust,
                                 const TrainingSetup& setup) {
  CheckFits out;
  if (candidates.empty()) return out;
  Inputs inputs(candidates);
  const auto set_of = [&](const LightCurveFits& fits) {
    return fitted_set(inputs.light_curves, inputs.supernovae, fits.fits, model, catalogue, dust,
                      {setup.cuts.earliest, setup.cuts.latest}, setup.trainer.threads);
  };
  out.as_given = fit_inputs(inputs, model, catalogue, dust, setup);
  out.offsets = offsets_of(set_of(out.as_given), model, catalogue, setup.trainer);
  std::map<Key, double> flux_factor;
  for (const ZeroPointOffset& offset : out.offsets)
    flux_factor[{offset.survey, offset.passband}] = std::pow(10.0, -0.4 * offset.offset);
  multiply(inputs.light_curves, flux_factor, flux_factor);
  out.with_offsets = fit_inputs(inputs, model, catalogue, dust, setup);
  out.error_factors = error_factors_of_fits(model, set_of(out.with_offsets), setup.trainer.threads);
  std::map<Key, double> error_factor;
  for (const ErrorFactor& one : out.error_factors) error_factor[{one.survey, one.passband}] = one.factor;
  multiply(inputs.light_curves, {}, error_factor);
  out.with_factors = fit_inputs(inputs, model, catalogue, dust, setup);
  return out;
}

}  // namespace thirdrung
