#include "lightcurve/noise.h"

#include <cmath>

namespace thirdrung {

Noise::Noise(const ObservedBands& observed, const Selection& selection, const SpectralTemplate& model,
             const Parameters& at, const Eigen::VectorXd& flux, const std::vector<double>& weights,
             bool template_scatter) {
  const auto n = static_cast<Eigen::Index>(selection.size());
  inverse_root_.resize(n);
  direction_.resize(n);
  for (const double weight : weights) root_weight_.push_back(std::sqrt(weight));
  for (Eigen::Index first = 0; first < n;) {
    const std::size_t b = observed.observations[selection[static_cast<std::size_t>(first)]].band;
    const ObservedBand& observed_band = observed.bands[b];
    Band band;
    band.first = first;
    double diagonal_product = 1;
    Eigen::Index i = first;
    for (; i < n; ++i) {
      const Observation& observation = observed.observations[selection[static_cast<std::size_t>(i)]];
      if (observation.band != b) break;
      double variance = observation.variance;
      if (template_scatter) {
        const double scatter =
            flux[i] * model.epoch_scatter(phase_of(observed, observation, at), observed_band.mean_wavelength);
        variance += scatter * scatter;
      }
      if (!weights.empty()) variance /= weights[static_cast<std::size_t>(i)];
      inverse_root_[i] = 1 / std::sqrt(variance);
      direction_[i] = observed_band.colour_scatter * flux[i] * inverse_root_[i];
      band.v_squared += direction_[i] * direction_[i];
      diagonal_product *= inverse_root_[i];
      if (diagonal_product < 1e-200 || diagonal_product > 1e200) {
        log_determinant_ -= 2 * std::log(diagonal_product);
        diagonal_product = 1;
      }
    }
    band.count = i - first;
    if (band.v_squared > 0) band.beta = (1 - 1 / std::sqrt(1 + band.v_squared)) / band.v_squared;
    log_determinant_ += std::log1p(band.v_squared) - 2 * std::log(diagonal_product);
    bands_.push_back(band);
    first = i;
  }
}

std::vector<double> Noise::own_pulls(const Eigen::VectorXd& residuals) const {
  std::vector<double> out(static_cast<std::size_t>(residuals.size()));
  for (const Band& band : bands_) {
    const auto v = direction_.segment(band.first, band.count);
    const Eigen::VectorXd scaled =
        residuals.segment(band.first, band.count).cwiseProduct(inverse_root_.segment(band.first, band.count));
    const double offset = v.dot(scaled) / (1 + band.v_squared);
    for (Eigen::Index k = 0; k < band.count; ++k) {
      const auto i = static_cast<std::size_t>(band.first + k);
      out[i] = scaled[k] - offset * v[k];
      if (!root_weight_.empty()) out[i] /= root_weight_[i];
    }
  }
  return out;
}

}  // namespace thirdrung
