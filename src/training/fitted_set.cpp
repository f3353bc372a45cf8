#include "training/fitted_set.h"

#include <algorithm>
#include <cmath>
#include <map>
#include <string>

#include "base/parallel.h"

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

}  // namespace

FittedSet fitted_set(std::span<const LightCurve> light_curves, std::span<const Supernova> supernovae,
                     std::span<const LightCurveFit> fits, const SpectralTemplate& model,
                     const PassbandCatalogue& catalogue, const Extinction& dust, std::pair<double, double> phases,
                     int threads) {
  const std::map<std::string, double> limit = limits_of(fits);
  std::map<Key, const LightCurveFit*> fit_of;
  for (const LightCurveFit& fit : fits) fit_of[{fit.survey, fit.supernova}] = &fit;
  std::map<Key, const Supernova*> supernova_of;
  for (const Supernova& one : supernovae) supernova_of[{one.survey, one.name}] = &one;
  std::vector<TrainingSupernova> prepared(light_curves.size());
  std::vector<SupernovaUnknowns> unknowns(light_curves.size());
  parallel_for(light_curves.size(), threads, [&](std::size_t k) {
    const LightCurve& light_curve = light_curves[k];
    const auto found = fit_of.find({light_curve.survey, light_curve.supernova});
    const auto supernova = supernova_of.find({light_curve.survey, light_curve.supernova});
    if (found == fit_of.end() || supernova == supernova_of.end()) return;
    const LightCurveFit& fit = *found->second;
    if (!(fit.dof > 0) || !std::isfinite(fit.t_0) || !(fit.chi2 <= limit.at(fit.survey) * fit.dof)) return;
    TrainingSupernova sn = prepare_supernova(light_curve, *supernova->second, fit.t_0, model, catalogue, dust, phases);
    keep_epochs(sn, [&](std::size_t e) {
      const double q = (sn.epochs[e].mjd - fit.t_0) / (1 + sn.z_helio) / fit.s;
      return q >= model.phase_min && q <= model.phase_max;
    });
    if (sn.epochs.size() < least_epochs) return;
    unknowns[k] = {fit.t_0, fit.m_b, fit.s, fit.c};
    prepared[k] = std::move(sn);
  });
  FittedSet out;
  for (std::size_t k = 0; k < prepared.size(); ++k) {
    if (prepared[k].epochs.empty()) continue;
    out.supernovae.push_back(std::move(prepared[k]));
    out.unknowns.push_back(unknowns[k]);
  }
  return out;
}

}  // namespace thirdrung
