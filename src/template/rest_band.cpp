#include "template/rest_band.h"

#include <cmath>

namespace thirdrung {

RestBand gauge_band_b(const SpectralTemplate& model) {
  return {"B", model.gauge_wavelength, model.gauge_weight_b};
}

RestBand gauge_band_v(const SpectralTemplate& model) {
  return {"V", model.gauge_wavelength, model.gauge_weight_v};
}

RestBand top_hat_band(const std::string& name, double blue, double red) {
  constexpr double step = 10;
  RestBand out{name, {}, {}};
  for (double wavelength = blue + 0.5 * step; wavelength < red; wavelength += step) {
    out.wavelength.push_back(wavelength);
    out.weight.push_back(wavelength);
  }
  return out;
}

std::vector<RestBand> rest_bands_ubvri(const SpectralTemplate& model) {
  return {top_hat_band("U", 3300, 4000), gauge_band_b(model), gauge_band_v(model), top_hat_band("R", 5800, 7200),
          top_hat_band("I", 7200, 8800)};
}

double magnitude_in(const RestBand& band, const SpectralTemplate& model, double p, double s, double c) {
  double sum = 0;
  for (std::size_t j = 0; j < band.weight.size(); ++j) {
    if (band.weight[j] != 0.0) sum += band.weight[j] * model.flux(p, band.wavelength[j], s, c);
  }
  return -2.5 * std::log10(sum);
}

}  // namespace thirdrung
