#pragma once

#include <string>
#include <vector>

#include "template/spectral_template.h"

namespace thirdrung {

/// A photon-counting band in the rest frame: magnitude = −2.5 log10 Σ weight φ.
struct RestBand {
  std::string name;
  std::vector<double> wavelength;  ///< [angstrom].
  std::vector<double> weight;      ///< Any constant in it is a constant in the magnitude.
};

/// Bessell B and V as the gauge has them: Vega magnitudes.
RestBand gauge_band_b(const SpectralTemplate& model);
RestBand gauge_band_v(const SpectralTemplate& model);

/// Top hat between two wavelengths [angstrom], weight ∝ λ; its magnitudes have no standard zero.
RestBand top_hat_band(const std::string& name, double blue, double red);

/// U (3300–4000 Å), B and V of the gauge, R (5800–7200 Å) and I (7200–8800 Å).
///
/// The three top hats stand about where Bessell's (1990, PASP 102, 1181) U, R and I have half their height. They show
/// the shape of light curves; they are not photometry in those bands.
std::vector<RestBand> rest_bands_ubvri(const SpectralTemplate& model);

/// Magnitude of the template at rest-frame phase p [d].
double magnitude_in(const RestBand& band, const SpectralTemplate& model, double p, double s = 1, double c = 0);

/// Mean over a band of any function of wavelength, weighted with the photons of the fiducial supernova at p = 0.
template <typename Function>
double mean_in(const RestBand& band, const SpectralTemplate& model, const Function& value) {
  double sum = 0;
  double all = 0;
  for (std::size_t j = 0; j < band.weight.size(); ++j) {
    const double photons = band.weight[j] * model.flux(0, band.wavelength[j], 1, 0);
    sum += photons * value(band.wavelength[j]);
    all += photons;
  }
  return sum / all;
}

}  // namespace thirdrung
