#include "lightcurve/prepared_template.h"

#include <cmath>

namespace thirdrung {

namespace {

/// Rest-frame B of the gauge, as a band at z = 0, or nothing if its wavelengths are not regular.
std::optional<BandWeights> gauge_b(const SpectralTemplate& model) {
  BandWeights out;
  out.wavelength = model.gauge_wavelength;
  out.weight = model.gauge_weight_b;
  if (out.wavelength.size() < 2) return std::nullopt;
  out.step = out.wavelength[1] - out.wavelength[0];
  const double first = std::round(out.wavelength[0] / out.step);
  for (std::size_t j = 0; j < out.wavelength.size(); ++j) {
    if (std::abs(out.wavelength[j] - (first + static_cast<double>(j)) * out.step) > 1e-6) return std::nullopt;
  }
  return out;
}

}  // namespace

PreparedTemplate::PreparedTemplate(const SpectralTemplate& model) : grid_(model) {
  if (const auto band = gauge_b(model)) b_band_.emplace(model, *band, -20.0, 60.0);
}

double PreparedTemplate::dm15_b(double s, double c) const {
  if (!b_band_) return model().dm15_b(s, c);
  const auto slope = [&](double q) {
    const BandFlux f = b_band_->at(q, s, c);
    return f.d_q / f.flux;
  };
  // Maximum of B by secant steps from q = 0, where it is by the gauge for s = 1 and c = 0.
  double before = -1;
  double now = 1;
  double slope_before = slope(before);
  for (int step = 0; step < 12 && std::abs(now - before) > 1e-7; ++step) {
    const double slope_now = slope(now);
    const double next = now - slope_now * (now - before) / (slope_now - slope_before);
    before = now;
    slope_before = slope_now;
    now = next;
  }
  if (!(std::abs(now) < 10)) return model().dm15_b(s, c);
  return -2.5 * std::log10(b_band_->at(now + 15 / s, s, c).flux / b_band_->at(now, s, c).flux);
}

}  // namespace thirdrung
