#pragma once

#include <Eigen/Dense>

#include "lightcurve/synthetic_template.h"

namespace thirdrung::testing {

/// Brings a template into its gauge exactly: adds a constant and a slope to Φ (in phase), Γ (in phase) and K (in
/// wavelength). B-splines reproduce straight lines from coefficients on that line at the basis' centres.
inline void put_into_gauge(SpectralTemplate& model) {
  const auto line = [](const CubicBasis& basis, double constant, double slope) {
    Eigen::VectorXd out(basis.size());
    const auto centre = basis.centres();
    for (int i = 0; i < basis.size(); ++i) out(i) = constant + slope * centre[static_cast<std::size_t>(i)];
    return out;
  };
  double flux = 0;
  double fall = 0;
  for (std::size_t j = 0; j < model.gauge_wavelength.size(); ++j) {
    const double w = model.gauge_wavelength[j];
    const double weighted = model.gauge_weight_b[j] * model.flux(0, w, 1, 0);
    const auto basis = model.wavelength_basis.at(w);
    const Eigen::VectorXd slope = model.phi_slice(0, true);
    double at = 0;
    for (int k = 0; k < 4; ++k) at += basis.value[static_cast<std::size_t>(k)] * slope(basis.first + k);
    flux += weighted;
    fall += weighted * at;
  }
  model.log_flux.colwise() += line(model.phase_basis, -std::log(flux), -fall / flux);

  const GaugeErrors before = gauge_errors(model);
  model.stretch_response.colwise() +=
      line(model.stretch_phase_basis, -before.stretch_at_peak, -(before.stretch_at_15 - before.stretch_at_peak) / 15);
  const auto mean_wavelength = [&](const std::vector<double>& weight) {
    double sum = 0;
    double moment = 0;
    for (std::size_t j = 0; j < weight.size(); ++j) {
      const double part = weight[j] * model.flux(0, model.gauge_wavelength[j], 1, 0);
      sum += part;
      moment += part * model.gauge_wavelength[j];
    }
    return moment / sum;
  };
  const double b = mean_wavelength(model.gauge_weight_b);
  const double v = mean_wavelength(model.gauge_weight_v);
  const double slope = -(before.colour_v - before.colour_b) / (v - b);
  model.colour_law += line(model.colour_basis, -before.colour_b - slope * b, slope);
}

/// The synthetic template in its gauge (to about 1e-6).
inline SpectralTemplate gauged_template() {
  SpectralTemplate out = synthetic_template();
  put_into_gauge(out);
  return out;
}

}  // namespace thirdrung::testing
