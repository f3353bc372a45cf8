#include "lightcurve/model_flux.h"

#include <cmath>

#include "base/constants.h"

namespace thirdrung {

Selection select(const ObservedBands& observed, const SpectralTemplate& model, const Parameters& at,
                 const FitOptions& options) {
  Selection out;
  out.reserve(observed.observations.size());
  for (std::size_t i = 0; i < observed.observations.size(); ++i) {
    const double p = phase_of(observed, observed.observations[i], at);
    const double q = p / at[2];
    if (p >= options.phase_min && p <= options.phase_max && q >= model.phase_min && q <= model.phase_max) {
      out.push_back(i);
    }
  }
  return out;
}

void model_flux(const ObservedBands& observed, const Selection& selection, const Parameters& at, Eigen::VectorXd& flux,
                FluxSlopes& slopes) {
  const auto n = static_cast<Eigen::Index>(selection.size());
  flux.resize(n);
  slopes.resize(n, 4);
  const double amplitude = std::exp(-constants::ln_flux_per_mag * at[1]);
  const double s = at[2];
  const StretchColour where(s, at[3]);
  const double q_per_day = 1 / ((1 + observed.z) * s);
  for (Eigen::Index i = 0; i < n; ++i) {
    const Observation& observation = observed.observations[selection[static_cast<std::size_t>(i)]];
    const double q = (observation.time - at[0]) * q_per_day;
    const BandFlux f = observed.bands[observation.band].table.at(q, where);
    flux[i] = amplitude * f.flux;
    slopes(i, 0) = -amplitude * f.d_q * q_per_day;
    slopes(i, 1) = -constants::ln_flux_per_mag * flux[i];
    slopes(i, 2) = amplitude * (f.d_s - f.d_q * q / s);
    slopes(i, 3) = amplitude * f.d_c;
  }
}

}  // namespace thirdrung
