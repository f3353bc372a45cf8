#include "training/training_set.h"

#include <algorithm>
#include <cmath>
#include <map>

namespace thirdrung {

namespace {

struct Range {
  int first = 0, count = 0;
};

Range range_of(const std::vector<CubicBasis::Weights>& weights) {
  const int first = weights.front().first;
  return {first, weights.back().first + 4 - first};
}

std::vector<CubicBasis::Weights> basis_at(const CubicBasis& basis, const std::vector<double>& wavelength) {
  std::vector<CubicBasis::Weights> out;
  out.reserve(wavelength.size());
  for (const double lambda : wavelength) out.push_back(basis.at(lambda));
  return out;
}

}  // namespace

TrainingBand band_on_bases(const std::string& id, BandWeights weights, const SpectralTemplate& bases) {
  TrainingBand band;
  band.passband = id;
  band.weights = std::move(weights);
  band.phi = basis_at(bases.wavelength_basis, band.weights.wavelength);
  band.gamma = basis_at(bases.stretch_wavelength_basis, band.weights.wavelength);
  band.colour = basis_at(bases.colour_basis, band.weights.wavelength);
  const Range phi = range_of(band.phi);
  const Range gamma = range_of(band.gamma);
  const Range colour = range_of(band.colour);
  band.phi_first = phi.first;
  band.phi_count = phi.count;
  band.gamma_first = gamma.first;
  band.gamma_count = gamma.count;
  band.colour_first = colour.first;
  band.colour_count = colour.count;
  return band;
}

TrainingSupernova prepare_supernova(const LightCurve& light_curve, const Supernova& supernova, double t_0_guess,
                                    const SpectralTemplate& bases, const PassbandCatalogue& catalogue,
                                    const Extinction& dust, std::pair<double, double> phases) {
  constexpr double rest_step = 10.0;
  TrainingSupernova out;
  out.name = supernova.name;
  out.survey = supernova.survey;
  out.z_helio = supernova.z_helio;
  out.t_0_guess = t_0_guess;
  std::map<std::string, std::vector<TrainingEpoch>> by_band;
  for (const Epoch& epoch : light_curve.epochs) {
    const double phase = (epoch.mjd - t_0_guess) / (1 + supernova.z_helio);
    if (phase < phases.first || phase > phases.second) continue;
    by_band[light_curve.passbands[epoch.passband]].push_back({epoch.mjd, epoch.flux, epoch.flux_error});
  }
  for (auto& [id, epochs] : by_band) {
    const Passband& passband = catalogue.at(id).passband;
    const auto [blue, red] = passband.core_range(0.02);
    if (blue / (1 + supernova.z_helio) < bases.wavelength_min || red / (1 + supernova.z_helio) > bases.wavelength_max)
      continue;
    const double ebv = std::isfinite(supernova.mw_ebv) ? supernova.mw_ebv : 0.0;
    TrainingBand band = band_on_bases(id, band_weights(passband, supernova.z_helio, dust, ebv, rest_step), bases);
    std::stable_sort(epochs.begin(), epochs.end(),
                     [](const TrainingEpoch& a, const TrainingEpoch& b) { return a.mjd < b.mjd; });
    band.begin = out.epochs.size();
    out.epochs.insert(out.epochs.end(), epochs.begin(), epochs.end());
    band.end = out.epochs.size();
    out.bands.push_back(std::move(band));
  }
  return out;
}

void keep_epochs(TrainingSupernova& sn, const std::function<bool(std::size_t)>& keep) {
  std::vector<TrainingEpoch> epochs;
  std::vector<TrainingBand> bands;
  for (TrainingBand& band : sn.bands) {
    const std::size_t begin = epochs.size();
    for (std::size_t e = band.begin; e < band.end; ++e) {
      if (keep(e)) epochs.push_back(sn.epochs[e]);
    }
    if (epochs.size() == begin) continue;
    band.begin = begin;
    band.end = epochs.size();
    bands.push_back(std::move(band));
  }
  sn.epochs = std::move(epochs);
  sn.bands = std::move(bands);
}

}  // namespace thirdrung
