#include "simulation/observe.h"

#include <algorithm>
#include <cmath>

#include "base/constants.h"
#include "simulation/simulated_passbands.h"
#include "template/band_weights.h"

namespace thirdrung {

namespace {

/// Part of a band's light that may lie outside the template, half of it at each end.
constexpr double uncovered_light = 0.02;
/// Rest-frame step of the integration over a band [angstrom].
constexpr double integration_step = 25;
/// Between two bands of one visit [d].
constexpr double filter_change = 0.005;

/// Flux of an AB magnitude [uJy].
double flux_of(double magnitude) {
  return constants::ab_zero_jansky * 1e6 * std::pow(10.0, -0.4 * magnitude);
}

struct Visit {
  double mjd = 0;
  double depth_change = 0;  ///< [mag].
};

bool in_season(const SimulatedSurvey& survey, double mjd) {
  for (int season = 0; season < survey.seasons; ++season) {
    const double first = survey.first_mjd + 365.25 * season;
    if (mjd >= first && mjd <= first + survey.season_length) return true;
  }
  return false;
}

std::vector<Visit> draw_visits(const SimulatedSurvey& survey, const SupernovaTruth& truth,
                               const SpectralTemplate& model, RandomStream& stream) {
  const double from_first = survey.first_phase + survey.first_phase_scatter * stream.normal();
  const double first = std::max(from_first, model.phase_min * truth.s);
  const double last = std::min(survey.last_phase, model.phase_max * truth.s);
  std::vector<Visit> out;
  const double offset = stream.uniform() * survey.cadence;
  const double end = truth.t_0 + last * (1 + truth.z_helio);
  double mjd = truth.t_0 + first * (1 + truth.z_helio) + offset;
  for (; mjd <= end; mjd += survey.cadence) {
    const double when = mjd + survey.cadence_scatter * stream.normal();
    const bool lost = stream.uniform() < survey.lost;
    const double depth_change = survey.depth_scatter * stream.normal();
    const double phase = (when - truth.t_0) / (1 + truth.z_helio);
    if (lost || phase < first || phase > last || !in_season(survey, when)) continue;
    out.push_back({when, depth_change});
  }
  std::sort(out.begin(), out.end(), [](const Visit& a, const Visit& b) { return a.mjd < b.mjd; });
  return out;
}

bool covered(const SpectralTemplate& model, const Passband& curve, double z) {
  const auto [blue, red] = curve.core_range(uncovered_light);
  return blue / (1 + z) >= model.wavelength_min && red / (1 + z) <= model.wavelength_max;
}

double template_flux(const SpectralTemplate& model, const BandWeights& band, const SupernovaTruth& truth, double p) {
  double sum = 0;
  for (std::size_t j = 0; j < band.weight.size(); ++j) {
    sum += band.weight[j] * model.flux(p, band.wavelength[j], truth.s, truth.c);
  }
  return std::pow(10.0, -0.4 * truth.m_b) * sum;
}

}  // namespace

std::vector<TruePassband> true_passbands(const SimulationOptions& options, const SimulatedSurvey& survey) {
  std::vector<TruePassband> out;
  for (const SurveyBand& band : survey.bands) {
    for (const SimulatedPassband& passband : options.passbands) {
      if (passband.id != band.passband) continue;
      out.push_back({simulated_curve(passband).shifted(passband.wavelength_shift), band.depth,
                     std::pow(10.0, -0.4 * passband.zero_point_shift)});
    }
  }
  return out;
}

LightCurve observe(const SimulationOptions& options, const SimulatedSurvey& survey,
                   const std::vector<TruePassband>& passbands, const SupernovaTruth& truth,
                   const SpectralTemplate& model, const Extinction& dust, RandomStream& stream) {
  LightCurve out;
  out.supernova = truth.name;
  out.survey = survey.name;
  const std::vector<Visit> visits = draw_visits(survey, truth, model, stream);
  for (const TruePassband& passband : passbands) {
    const double colour_draw = stream.normal();
    if (!covered(model, passband.curve, truth.z_helio)) continue;
    const BandWeights weights = band_weights(passband.curve, truth.z_helio, dust, truth.mw_ebv, integration_step);
    const double common = options.template_scatter ? colour_draw * model.colour_scatter(weights.mean_wavelength) : 0.0;
    const double band_delay = filter_change * static_cast<double>(out.passbands.size());
    for (const Visit& visit : visits) {
      Epoch epoch;
      epoch.mjd = visit.mjd + band_delay;
      epoch.passband = out.passbands.size();
      const double p = (epoch.mjd - truth.t_0) / (1 + truth.z_helio);
      const double flux = template_flux(model, weights, truth, p);
      const double own =
          options.template_scatter ? stream.normal() * model.epoch_scatter(p, weights.mean_wavelength) : 0.0;
      const double sky = flux_of(passband.depth + visit.depth_change) / 5;
      epoch.flux_error = passband.flux_factor * std::hypot(sky, survey.noise_floor * flux);
      epoch.flux = passband.flux_factor * flux * (1 + common + own) + epoch.flux_error * stream.normal();
      epoch.row = out.epochs.size() + 1;
      out.epochs.push_back(epoch);
    }
    out.passbands.push_back(passband.curve.id());
  }
  return out;
}

bool is_detected(const SimulatedSurvey& survey, const LightCurve& light_curve) {
  if (survey.detections == 0) return true;
  std::vector<int> seen(light_curve.passbands.size(), 0);
  for (const Epoch& epoch : light_curve.epochs) {
    if (epoch.flux > survey.detection_snr * epoch.flux_error) ++seen[epoch.passband];
  }
  return std::any_of(seen.begin(), seen.end(), [&](int count) { return count >= survey.detections; });
}

}  // namespace thirdrung
