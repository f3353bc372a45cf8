#include "lightcurve/observed_bands.h"

#include <fmt/format.h>

#include <algorithm>

namespace thirdrung {

namespace {

/// Part of a band's light that may lie outside the template, half of it at each end.
constexpr double uncovered_light = 0.02;

/// Why the template does not cover a band, or nothing.
std::string uncovered(const SpectralTemplate& model, const Passband& passband, double z) {
  const auto [blue, red] = passband.core_range(uncovered_light);
  const char* side = nullptr;
  if (blue / (1 + z) < model.wavelength_min) side = "blueward";
  if (red / (1 + z) > model.wavelength_max) side = "redward";
  if (!side) return "";
  return fmt::format("rest frame {:.0f}-{:.0f} Angstrom reaches {} of the template's {:.0f}-{:.0f}", blue / (1 + z),
                     red / (1 + z), side, model.wavelength_min, model.wavelength_max);
}

void add_observations(const LightCurve& light_curve, ObservedBands& out) {
  std::vector<std::size_t> band_of(light_curve.passbands.size(), out.bands.size());
  for (std::size_t b = 0; b < out.bands.size(); ++b) band_of[out.bands[b].passband] = b;
  double first = 0;
  double last = 0;
  for (std::size_t i = 0; i < light_curve.epochs.size(); ++i) {
    const Epoch& epoch = light_curve.epochs[i];
    const std::size_t band = band_of[epoch.passband];
    if (band == out.bands.size()) continue;
    const bool is_first = out.observations.empty();
    first = is_first ? epoch.mjd : std::min(first, epoch.mjd);
    last = is_first ? epoch.mjd : std::max(last, epoch.mjd);
    out.observations.push_back({epoch.mjd, epoch.flux, epoch.flux_error * epoch.flux_error, band, i});
  }
  out.reference_mjd = 0.5 * (first + last);
  out.half_span = 0.5 * (last - first);
  for (Observation& observation : out.observations) observation.time -= out.reference_mjd;
  std::sort(out.observations.begin(), out.observations.end(), [](const Observation& a, const Observation& b) {
    if (a.band != b.band) return a.band < b.band;
    return a.time != b.time ? a.time < b.time : a.epoch < b.epoch;
  });
}

}  // namespace

ObservedBands observed_bands(const LightCurve& light_curve, const Supernova& supernova,
                             const PreparedTemplate& prepared, const PassbandCatalogue& catalogue,
                             const Extinction& dust, bool template_scatter) {
  ObservedBands out;
  out.z = supernova.z_helio;
  const SpectralTemplate& model = prepared.model();
  std::vector<std::pair<double, std::size_t>> blue_to_red;
  for (std::size_t k = 0; k < light_curve.passbands.size(); ++k) {
    const Passband& passband = catalogue.at(light_curve.passbands[k]).passband;
    const std::string reason = uncovered(model, passband, out.z);
    if (reason.empty()) {
      blue_to_red.emplace_back(passband.mean_wavelength(), k);
    } else {
      out.left_out.push_back({light_curve.passbands[k], reason});
    }
  }
  std::sort(blue_to_red.begin(), blue_to_red.end());
  for (const auto& [wavelength, k] : blue_to_red) {
    const Passband& passband = catalogue.at(light_curve.passbands[k]).passband;
    const BandWeights weights =
        band_weights(passband, out.z, dust, supernova.mw_ebv, prepared.grid().wavelength_step());
    const double scatter = template_scatter ? model.colour_scatter(weights.mean_wavelength) : 0.0;
    out.bands.push_back({k, BandTable(prepared.grid(), weights), weights.mean_wavelength, scatter});
  }
  add_observations(light_curve, out);
  return out;
}

}  // namespace thirdrung
