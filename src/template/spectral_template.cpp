#include "template/spectral_template.h"

#include <algorithm>
#include <cmath>

#include "base/constants.h"

namespace thirdrung {

namespace {

double tensor(const CubicBasis& phase, const CubicBasis& wavelength, const Eigen::MatrixXd& coefficients, double q,
              double lambda) {
  const auto wp = phase.at(q);
  const auto wl = wavelength.at(lambda);
  double sum = 0;
  for (int i = 0; i < 4; ++i) {
    for (int j = 0; j < 4; ++j) {
      sum += wp.value[static_cast<std::size_t>(i)] * wl.value[static_cast<std::size_t>(j)] *
             coefficients(wp.first + i, wl.first + j);
    }
  }
  return sum;
}

Eigen::VectorXd slice(const CubicBasis& phase, const Eigen::MatrixXd& coefficients, double q, bool slope) {
  const auto w = slope ? phase.slope_at(q) : phase.at(q);
  const Eigen::Map<const Eigen::RowVector4d> weights(w.value.data());
  return (weights * coefficients.middleRows(w.first, 4)).transpose();
}

double along(const CubicBasis& basis, const Eigen::VectorXd& coefficients, double x) {
  const auto w = basis.at(x);
  double sum = 0;
  for (int j = 0; j < 4; ++j) sum += w.value[static_cast<std::size_t>(j)] * coefficients(w.first + j);
  return sum;
}

struct Between {
  std::size_t left;
  double fraction;
};

Between between(const std::vector<double>& nodes, double x) {
  if (nodes.size() < 2 || x <= nodes.front()) return {0, 0.0};
  if (x >= nodes.back()) return {nodes.size() - 2, 1.0};
  const auto left = static_cast<std::size_t>(std::upper_bound(nodes.begin(), nodes.end(), x) - nodes.begin()) - 1;
  return {left, (x - nodes[left]) / (nodes[left + 1] - nodes[left])};
}

double gauge_flux(const SpectralTemplate& model, const std::vector<double>& weight, double p, double s, double c) {
  double sum = 0;
  for (std::size_t j = 0; j < weight.size(); ++j) {
    if (weight[j] != 0.0) sum += weight[j] * model.flux(p, model.gauge_wavelength[j], s, c);
  }
  return sum;
}

/// Phase of B maximum near p = 0, to 1e-9 d: golden-section search.
double peak_phase(const SpectralTemplate& model, double s, double c) {
  const double ratio = 0.6180339887498949;
  double low = -5;
  double high = 5;
  double a = high - ratio * (high - low);
  double b = low + ratio * (high - low);
  double at_a = model.b_magnitude(a, s, c);
  double at_b = model.b_magnitude(b, s, c);
  while (high - low > 1e-9) {
    if (at_a < at_b) {
      high = b;
      b = a;
      at_b = at_a;
      a = high - ratio * (high - low);
      at_a = model.b_magnitude(a, s, c);
    } else {
      low = a;
      a = b;
      at_a = at_b;
      b = low + ratio * (high - low);
      at_b = model.b_magnitude(b, s, c);
    }
  }
  return 0.5 * (low + high);
}

/// Phase where the slope of the B light curve vanishes: secant steps on central differences, which a golden-section
/// search alone cannot reach (a maximum is flat to half the digits).
double refined_peak_phase(const SpectralTemplate& model) {
  const auto slope = [&](double p) { return model.b_magnitude(p + 0.01) - model.b_magnitude(p - 0.01); };
  double before = peak_phase(model, 1, 0) - 0.1;
  double now = before + 0.2;
  double slope_before = slope(before);
  for (int step = 0; step < 20 && std::abs(now - before) > 1e-10; ++step) {
    const double slope_now = slope(now);
    const double next = now - slope_now * (now - before) / (slope_now - slope_before);
    before = now;
    slope_before = slope_now;
    now = next;
  }
  return now;
}

}  // namespace

double SpectralTemplate::phi(double q, double wavelength) const {
  return tensor(phase_basis, wavelength_basis, log_flux, q, wavelength);
}

double SpectralTemplate::gamma(double q, double wavelength) const {
  return tensor(stretch_phase_basis, stretch_wavelength_basis, stretch_response, q, wavelength);
}

double SpectralTemplate::colour(double wavelength) const {
  return along(colour_basis, colour_law, wavelength);
}

double SpectralTemplate::flux(double p, double wavelength, double s, double c) const {
  const double q = p / s;
  return std::exp(phi(q, wavelength) + (s - 1) * gamma(q, wavelength) -
                  constants::ln_flux_per_mag * c * colour(wavelength));
}

Eigen::VectorXd SpectralTemplate::phi_slice(double q, bool slope) const {
  return slice(phase_basis, log_flux, q, slope);
}

Eigen::VectorXd SpectralTemplate::gamma_slice(double q, bool slope) const {
  return slice(stretch_phase_basis, stretch_response, q, slope);
}

double SpectralTemplate::epoch_scatter(double p, double wavelength) const {
  if (log_epoch_scatter.size() == 0) return 0.0;
  const Between i = between(scatter_phase, p);
  const Between j = between(scatter_wavelength, wavelength);
  const auto row = static_cast<Eigen::Index>(i.left);
  const auto col = static_cast<Eigen::Index>(j.left);
  const double low = (1 - j.fraction) * log_epoch_scatter(row, col) + j.fraction * log_epoch_scatter(row, col + 1);
  const double high =
      (1 - j.fraction) * log_epoch_scatter(row + 1, col) + j.fraction * log_epoch_scatter(row + 1, col + 1);
  return std::exp((1 - i.fraction) * low + i.fraction * high);
}

double SpectralTemplate::colour_scatter(double wavelength) const {
  if (log_colour_scatter.size() == 0) return 0.0;
  const Between j = between(colour_scatter_wavelength, wavelength);
  const auto col = static_cast<Eigen::Index>(j.left);
  return std::exp((1 - j.fraction) * log_colour_scatter(col) + j.fraction * log_colour_scatter(col + 1));
}

double SpectralTemplate::b_magnitude(double p, double s, double c) const {
  return -2.5 * std::log10(gauge_flux(*this, gauge_weight_b, p, s, c));
}

double SpectralTemplate::v_magnitude(double p, double s, double c) const {
  return -2.5 * std::log10(gauge_flux(*this, gauge_weight_v, p, s, c));
}

double SpectralTemplate::dm15_b(double s, double c) const {
  const double peak = peak_phase(*this, s, c);
  return b_magnitude(peak + 15, s, c) - b_magnitude(peak, s, c);
}

double GaugeErrors::largest() const {
  return std::max({std::abs(peak_phase), std::abs(peak_magnitude), std::abs(colour_b), std::abs(colour_v),
                   std::abs(stretch_at_peak), std::abs(stretch_at_15)});
}

GaugeErrors gauge_errors(const SpectralTemplate& model) {
  GaugeErrors out;
  out.peak_phase = refined_peak_phase(model);
  out.peak_magnitude = model.b_magnitude(0);
  double flux_b = 0;
  double flux_v = 0;
  double colour_b = 0;
  double colour_v = 0;
  double gamma_peak = 0;
  double gamma_15 = 0;
  double flux_15 = 0;
  for (std::size_t j = 0; j < model.gauge_wavelength.size(); ++j) {
    const double wavelength = model.gauge_wavelength[j];
    const double at_peak = model.flux(0, wavelength, 1, 0);
    const double at_15 = model.flux(15, wavelength, 1, 0);
    flux_b += model.gauge_weight_b[j] * at_peak;
    flux_v += model.gauge_weight_v[j] * at_peak;
    flux_15 += model.gauge_weight_b[j] * at_15;
    colour_b += model.gauge_weight_b[j] * at_peak * model.colour(wavelength);
    colour_v += model.gauge_weight_v[j] * at_peak * model.colour(wavelength);
    gamma_peak += model.gauge_weight_b[j] * at_peak * model.gamma(0, wavelength);
    gamma_15 += model.gauge_weight_b[j] * at_15 * model.gamma(15, wavelength);
  }
  out.colour_b = colour_b / flux_b;
  out.colour_v = colour_v / flux_v + 1;
  out.stretch_at_peak = gamma_peak / flux_b;
  out.stretch_at_15 = gamma_15 / flux_15;
  return out;
}

}  // namespace thirdrung
