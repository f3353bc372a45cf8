#include "template/band_weights.h"

#include <algorithm>
#include <cmath>
#include <vector>

#include "base/constants.h"

namespace thirdrung {

namespace {

/// Observer-frame wavelengths at which the response, or the rest-frame grid, has a corner.
std::vector<double> corners(const Passband& passband, double z, const std::vector<double>& rest_grid) {
  std::vector<double> out;
  for (const double wavelength : passband.wavelength()) {
    if (wavelength >= passband.blue_edge() && wavelength <= passband.red_edge()) out.push_back(wavelength);
  }
  for (const double wavelength : rest_grid) {
    const double observed = wavelength * (1 + z);
    if (observed > passband.blue_edge() && observed < passband.red_edge()) out.push_back(observed);
  }
  std::sort(out.begin(), out.end());
  out.erase(std::unique(out.begin(), out.end(), [](double a, double b) { return std::abs(a - b) < 1e-9; }), out.end());
  return out;
}

}  // namespace

BandWeights band_weights(const Passband& passband, double z, const Extinction& dust, double ebv, double step) {
  BandWeights out;
  const double rest_blue = passband.blue_edge() / (1 + z);
  const double rest_red = passband.red_edge() / (1 + z);
  const double start = std::floor(rest_blue / step) * step;
  const auto count = static_cast<std::size_t>(std::ceil((rest_red - start) / step)) + 1;
  out.wavelength.resize(count);
  for (std::size_t j = 0; j < count; ++j) out.wavelength[j] = start + step * static_cast<double>(j);
  out.weight.assign(count, 0.0);
  out.mean_wavelength = passband.mean_wavelength() / (1 + z);

  // Response × dust × λ is close to quadratic between corners, and times a hat function cubic: three Gauss points are
  // exact to order 5.
  constexpr double node = 0.7745966692414834;
  constexpr double node_weight[3] = {5.0 / 18.0, 8.0 / 18.0, 5.0 / 18.0};
  constexpr double node_place[3] = {0.5 * (1 - node), 0.5, 0.5 * (1 + node)};
  const std::vector<double> corner = corners(passband, z, out.wavelength);
  for (std::size_t i = 0; i + 1 < corner.size(); ++i) {
    const double width = corner[i + 1] - corner[i];
    for (int g = 0; g < 3; ++g) {
      const double observed = corner[i] + width * node_place[g];
      const double response = passband.throughput_at(observed) * observed * width * node_weight[g];
      const double seen =
          ebv == 0.0 ? response : response * std::exp(-constants::ln_flux_per_mag * dust.magnitudes(observed, ebv));
      const double place = (observed / (1 + z) - start) / step;
      const auto left = std::min(static_cast<std::size_t>(place), count - 2);
      const double fraction = place - static_cast<double>(left);
      out.weight[left] += seen * (1 - fraction);
      out.weight[left + 1] += seen * fraction;
    }
  }
  const double to_ujy = constants::ab_zero_jansky * 1e6 /
                        (constants::planck_times_c_erg_angstrom * passband.photon_rate_ab_zero() * (1 + z));
  for (double& weight : out.weight) weight *= to_ujy;
  return out;
}

}  // namespace thirdrung
