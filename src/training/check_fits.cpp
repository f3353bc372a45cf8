#include <cmath>
#include <map>

#include "base/parallel.h"
#include "training/run_training.h"

namespace thirdrung {

namespace {

/// Offsets from the fits of a sound χ² alone: a peculiar supernova says nothing of a zero point.
std::vector<ZeroPointOffset> offsets_of(std::span<const TrainingCandidate> candidates, const LightCurveFits& fits,
                                        const SpectralTemplate& model, const PassbandCatalogue& catalogue,
                                        const Extinction& dust, const TrainingSetup& setup) {
  std::map<std::pair<std::string, std::string>, const LightCurveFit*> fit_of;
  for (const LightCurveFit& fit : fits.fits) fit_of[{fit.survey, fit.supernova}] = &fit;
  std::vector<TrainingSupernova> supernovae;
  std::vector<SupernovaUnknowns> unknowns;
  std::vector<Eigen::VectorXd> weights;
  for (const TrainingCandidate& candidate : candidates) {
    const auto found = fit_of.find({candidate.supernova.survey, candidate.supernova.name});
    if (found == fit_of.end() || !std::isfinite(found->second->t_0)) continue;
    const LightCurveFit& fit = *found->second;
    if (fit.chi2 > setup.cuts.most_chi2_per_dof * std::max(1, fit.dof)) continue;
    TrainingSupernova sn = prepare_supernova(candidate.light_curve, candidate.supernova, fit.t_0, model, catalogue,
                                             dust, {setup.cuts.earliest, setup.cuts.latest});
    if (sn.epochs.size() < 5) continue;
    SupernovaUnknowns at{fit.t_0, fit.m_b, fit.s, fit.c};
    Eigen::VectorXd weight = robust_weights_of(model, sn, at, setup.trainer.robust_degrees);
    supernovae.push_back(std::move(sn));
    unknowns.push_back(at);
    weights.push_back(std::move(weight));
  }
  return zero_point_offsets(model, supernovae, unknowns, weights, setup.trainer.prior, 0.1, setup.trainer.threads);
}

}  // namespace

LightCurveFits fit_candidates(std::span<const TrainingCandidate> candidates, const SpectralTemplate& model,
                              const PassbandCatalogue& catalogue, const Extinction& dust, const TrainingSetup& setup) {
  std::vector<LightCurve> light_curves;
  std::vector<Supernova> supernovae;
  for (const TrainingCandidate& candidate : candidates) {
    light_curves.push_back(candidate.light_curve);
    supernovae.push_back(candidate.supernova);
  }
  return fit_all(light_curves, supernovae, PreparedTemplate(model), catalogue, dust, setup.fit, setup.trainer.threads);
}

CheckFits check_on_other_surveys(std::span<const TrainingCandidate> candidates, const SpectralTemplate& model,
                                 const PassbandCatalogue& catalogue, const Extinction& dust,
                                 const TrainingSetup& setup) {
  CheckFits out;
  if (candidates.empty()) return out;
  out.as_given = fit_candidates(candidates, model, catalogue, dust, setup);
  out.offsets = offsets_of(candidates, out.as_given, model, catalogue, dust, setup);
  std::map<std::pair<std::string, std::string>, double> factor;
  for (const ZeroPointOffset& offset : out.offsets) {
    factor[{offset.survey, offset.passband}] = std::pow(10.0, -0.4 * offset.offset);
  }
  std::vector<TrainingCandidate> moved(candidates.begin(), candidates.end());
  for (TrainingCandidate& candidate : moved) {
    for (Epoch& epoch : candidate.light_curve.epochs) {
      const auto found = factor.find({candidate.light_curve.survey, candidate.light_curve.passbands[epoch.passband]});
      if (found == factor.end()) continue;
      epoch.flux *= found->second;
      epoch.flux_error *= found->second;
    }
  }
  out.with_offsets = fit_candidates(moved, model, catalogue, dust, setup);
  return out;
}

}  // namespace thirdrung
