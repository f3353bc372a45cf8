#include <cmath>

#include "base/constants.h"
#include "light/passband_catalogue.h"

namespace thirdrung {

namespace {

constexpr double ab_zero_ujy = constants::ab_zero_jansky * 1e6;

}  // namespace

double CalibratedPassband::flux_of_magnitude(double magnitude) const {
  return ab_zero_ujy * std::pow(10.0, -0.4 * (magnitude + ab_offset + ab_magnitude_of_zero));
}

double CalibratedPassband::flux_of_flux(double flux_ujy) const {
  return flux_ujy * std::pow(10.0, -0.4 * ab_offset);
}

double CalibratedPassband::magnitude_of_flux(double flux_ujy) const {
  return -2.5 * std::log10(flux_ujy / ab_zero_ujy) - ab_offset - ab_magnitude_of_zero;
}

}  // namespace thirdrung
