#include "training/fitted_set.h"

#include <algorithm>
#include <cmath>
#include <map>
#include <string>

#include "training/trainer.h"

namespace thirdrung {

namespace {

constexpr double most_of_median = 3;
constexpr std::size_t least_epochs = 5;

using Key = std::pair<std::string, std::string>;

/// Largest χ² per degree of freedom of each survey's ordinary fits.
std::map<std::string, double> limits_of(std::span<const LightCurveFit> fits) {
  std::map<std::string, std::vector<double>> all;
  for (const LightCurveFit& fit : fits) {
    if (fit.dof > 0 && std::isfinite(fit.chi2)) all[fit.survey].push_back(fit.chi2 / fit.dof);
  }
  std::map<std::string, double> out;
  for (auto& [survey, values] : all) {
    const auto middle = values.begin() + static_cast<std::ptrdiff_t>(values.size() / 2);
    std::nth_element(values.begin(), middle, values.end());
    out[survey] = most_of_median * std::max(1.0, *middle);
  }
  return out;
}

void drop_wild_epochs(const SpectralTemplate& model, const SupernovaUnknowns& at, double largest_pull,
                      TrainingSupernova& sn) {
  if (std::isinf(largest_pull)) return;
  // With one degree of freedom the weight of a pull x is 2/(1 + x^2).
  const Eigen::VectorXd weight = robust_weights_of(model, sn, at, 1);
  const double least = 2 / (1 + largest_pull * largest_pull);
  std::vector<TrainingEpoch> epochs;
  std::vector<TrainingBand> bands;
  for (TrainingBand& band : sn.bands) {
    const std::size_t begin = epochs.size();
    for (std::size_t e = band.begin; e < band.end; ++e) {
      if (weight(static_cast<Eigen::Index>(e)) >= least) epochs.push_back(sn.epochs[e]);
    }
    if (epochs.size() == begin) continue;
    band.begin = begin;
    band.end = epochs.size();
    bands.push_back(std::move(band));
  }
  sn.epochs = std::move(epochs);
  sn.bands = std::move(bands);
}

}  // namespace

FittedSet fitted_set(std::span<const LightCurve> light_curves, std::span<const Supernova> supernovae,
                     std::span<const LightCurveFit> fits, const SpectralTemplate& model,
                     const PassbandCatalogue& catalogue, const Extinction& dust, std::pair<double, double> phases,
                     double largest_pull) {
  const std::map<std::string, double> limit = limits_of(fits);
  std::map<Key, const LightCurveFit*> fit_of;
  for (const LightCurveFit& fit : fits) fit_of[{fit.survey, fit.supernova}] = &fit;
  std::map<Key, const Supernova*> supernova_of;
  for (const Supernova& one : supernovae) supernova_of[{one.survey, one.name}] = &one;
  FittedSet out;
  for (const LightCurve& light_curve : light_curves) {
    const auto found = fit_of.find({light_curve.survey, light_curve.supernova});
    const auto supernova = supernova_of.find({light_curve.survey, light_curve.supernova});
    if (found == fit_of.end() || supernova == supernova_of.end()) continue;
    const LightCurveFit& fit = *found->second;
    if (!(fit.dof > 0) || !std::isfinite(fit.t_0) || !(fit.chi2 <= limit.at(fit.survey) * fit.dof)) continue;
    TrainingSupernova sn = prepare_supernova(light_curve, *supernova->second, fit.t_0, model, catalogue, dust, phases);
    const SupernovaUnknowns at{fit.t_0, fit.m_b, fit.s, fit.c};
    drop_wild_epochs(model, at, largest_pull, sn);
    if (sn.epochs.size() < least_epochs) continue;
    out.supernovae.push_back(std::move(sn));
    out.unknowns.push_back(at);
  }
  return out;
}

}  // namespace thirdrung
