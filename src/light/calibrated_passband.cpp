#include <cmath>
#include <stdexcept>

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

CalibratedPassband with_wavelength_shift(const CalibratedPassband& calibrated, double shift_angstrom,
                                         const std::optional<Spectrum>& standard_star) {
  CalibratedPassband out = calibrated;
  out.passband = calibrated.passband.shifted(shift_angstrom);
  if (calibrated.system == MagnitudeSystem::synthetic) {
    out.ab_magnitude_of_zero +=
        2.5 * std::log10(out.passband.photon_rate_ab_zero() / calibrated.passband.photon_rate_ab_zero());
  } else if (calibrated.system == MagnitudeSystem::standard) {
    if (!standard_star)
      throw std::logic_error("a passband on a standard star's system cannot be moved without its spectrum");
    out.ab_magnitude_of_zero +=
        ab_magnitude(*standard_star, out.passband) - ab_magnitude(*standard_star, calibrated.passband);
  }
  return out;
}

}  // namespace thirdrung
