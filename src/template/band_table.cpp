#include "template/band_table.h"

#include <algorithm>
#include <cmath>
#include <stdexcept>

#include "base/constants.h"

namespace thirdrung {

namespace {

/// Values of a spline in wavelength at the points of a band, from its coefficients and the basis there.
std::vector<double> on_band(const Eigen::VectorXd& coefficients, const std::vector<CubicBasis::Weights>& weights) {
  std::vector<double> out(weights.size());
  for (std::size_t j = 0; j < weights.size(); ++j) {
    const double* c = coefficients.data() + weights[j].first;
    const auto& w = weights[j].value;
    out[j] = w[0] * c[0] + w[1] * c[1] + w[2] * c[2] + w[3] * c[3];
  }
  return out;
}

std::vector<CubicBasis::Weights> basis_on_band(const CubicBasis& basis, const std::vector<double>& wavelength) {
  std::vector<CubicBasis::Weights> out;
  out.reserve(wavelength.size());
  for (const double lambda : wavelength) out.push_back(basis.at(lambda));
  return out;
}

/// Exponents (i, j) of u^i c^j, in order of total degree.
constexpr std::array<std::array<int, 2>, 15> exponents = {{{0, 0},
                                                           {1, 0},
                                                           {0, 1},
                                                           {2, 0},
                                                           {1, 1},
                                                           {0, 2},
                                                           {3, 0},
                                                           {2, 1},
                                                           {1, 2},
                                                           {0, 3},
                                                           {4, 0},
                                                           {3, 1},
                                                           {2, 2},
                                                           {1, 3},
                                                           {0, 4}}};

/// Central moments E[g^i k^j] under the weights, to joint cumulants divided by i! j! (Kendall & Stuart, "The Advanced
/// Theory of Statistics", vol. 1, ch. 13: for central moments the second and third joint cumulants are the moments
/// themselves, the fourth lose the products of second moments).
std::array<double, 15> expansion_from_moments(double log_sum, double mean_g, double mean_k,
                                              const std::array<double, 15>& m) {
  std::array<double, 15> k{};
  k[0] = log_sum;
  k[1] = mean_g;
  k[2] = mean_k;
  k[3] = m[3] / 2;
  k[4] = m[4];
  k[5] = m[5] / 2;
  k[6] = m[6] / 6;
  k[7] = m[7] / 2;
  k[8] = m[8] / 2;
  k[9] = m[9] / 6;
  k[10] = (m[10] - 3 * m[3] * m[3]) / 24;
  k[11] = (m[11] - 3 * m[3] * m[4]) / 6;
  k[12] = (m[12] - m[3] * m[5] - 2 * m[4] * m[4]) / 4;
  k[13] = (m[13] - 3 * m[5] * m[4]) / 6;
  k[14] = (m[14] - 3 * m[5] * m[5]) / 24;
  return k;
}

}  // namespace

BandFlux integrate_band(const SpectralTemplate& model, const BandWeights& band, double q, double s, double c) {
  const auto phi_basis = basis_on_band(model.wavelength_basis, band.wavelength);
  const auto gamma_basis = basis_on_band(model.stretch_wavelength_basis, band.wavelength);
  const auto colour_basis = basis_on_band(model.colour_basis, band.wavelength);
  const auto phi = on_band(model.phi_slice(q), phi_basis);
  const auto phi_slope = on_band(model.phi_slice(q, true), phi_basis);
  const auto gamma = on_band(model.gamma_slice(q), gamma_basis);
  const auto gamma_slope = on_band(model.gamma_slice(q, true), gamma_basis);
  const auto colour = on_band(model.colour_law, colour_basis);
  BandFlux out;
  for (std::size_t j = 0; j < band.weight.size(); ++j) {
    const double f =
        band.weight[j] * std::exp(phi[j] + (s - 1) * gamma[j] - constants::ln_flux_per_mag * c * colour[j]);
    out.flux += f;
    out.d_q += f * (phi_slope[j] + (s - 1) * gamma_slope[j]);
    out.d_s += f * gamma[j];
    out.d_c -= f * constants::ln_flux_per_mag * colour[j];
  }
  return out;
}

BandTable::BandTable(const SpectralTemplate& model, const BandWeights& band, double q_min, double q_max)
    : mean_wavelength_(band.mean_wavelength) {
  if (!(q_max > q_min)) throw std::invalid_argument("a band table needs a range of phases");
  // Nodes at the template's breakpoints (where its third derivative jumps) and at points between them.
  constexpr double widest = 1.5;
  std::vector<double> stops = {q_min};
  for (const CubicBasis* basis : {&model.phase_basis, &model.stretch_phase_basis}) {
    for (const double b : basis->breakpoints()) {
      if (b > q_min && b < q_max) stops.push_back(b);
    }
  }
  stops.push_back(q_max);
  std::sort(stops.begin(), stops.end());
  stops.erase(std::unique(stops.begin(), stops.end()), stops.end());
  for (std::size_t i = 0; i + 1 < stops.size(); ++i) {
    const int parts = std::max(1, static_cast<int>(std::ceil((stops[i + 1] - stops[i]) / widest - 1e-9)));
    for (int k = 0; k < parts; ++k) q_.push_back(stops[i] + (stops[i + 1] - stops[i]) * k / parts);
  }
  q_.push_back(q_max);

  const auto phi_basis = basis_on_band(model.wavelength_basis, band.wavelength);
  const auto gamma_basis = basis_on_band(model.stretch_wavelength_basis, band.wavelength);
  const auto colour_basis = basis_on_band(model.colour_basis, band.wavelength);
  const auto colour = on_band(model.colour_law, colour_basis);
  nodes_.resize(q_.size());
  const std::size_t points = band.weight.size();
  std::vector<double> f(points);
  for (std::size_t n = 0; n < q_.size(); ++n) {
    const double q = q_[n];
    const auto phi = on_band(model.phi_slice(q), phi_basis);
    const auto phi_slope = on_band(model.phi_slice(q, true), phi_basis);
    const auto gamma = on_band(model.gamma_slice(q), gamma_basis);
    const auto gamma_slope = on_band(model.gamma_slice(q, true), gamma_basis);
    double sum = 0;
    double mean_g = 0;
    double mean_k = 0;
    for (std::size_t j = 0; j < points; ++j) {
      f[j] = band.weight[j] * std::exp(phi[j]);
      sum += f[j];
      mean_g += f[j] * gamma[j];
      mean_k -= f[j] * constants::ln_flux_per_mag * colour[j];
    }
    mean_g /= sum;
    mean_k /= sum;
    // Moments of (Γ, −0.921 K), and their derivatives in q: d/dq E[x] = E[x Φ'] − E[x] E[Φ'] + E[dx/dq].
    std::array<double, terms> moment{};
    std::array<double, terms> moment_slope{};
    double mean_phi_slope = 0;
    double mean_g_slope = 0;
    double mean_k_slope = 0;
    for (std::size_t j = 0; j < points; ++j) {
      const double w = f[j] / sum;
      mean_phi_slope += w * phi_slope[j];
      mean_g_slope += w * (gamma_slope[j] + (gamma[j] - mean_g) * phi_slope[j]);
      mean_k_slope += w * (-constants::ln_flux_per_mag * colour[j] - mean_k) * phi_slope[j];
    }
    for (std::size_t j = 0; j < points; ++j) {
      const double w = f[j] / sum;
      const double g = gamma[j] - mean_g;
      const double k = -constants::ln_flux_per_mag * colour[j] - mean_k;
      const double g_powers[5] = {1, g, g * g, g * g * g, g * g * g * g};
      const double k_powers[5] = {1, k, k * k, k * k * k, k * k * k * k};
      const double density = phi_slope[j] - mean_phi_slope;
      const double dg = gamma_slope[j] - mean_g_slope;
      const double dk = -mean_k_slope;
      for (std::size_t t = 3; t < terms; ++t) {
        const int a = exponents[t][0];
        const int b = exponents[t][1];
        const double product = g_powers[a] * k_powers[b];
        double slope = product * density;
        if (a > 0) slope += a * g_powers[a - 1] * k_powers[b] * dg;
        if (b > 0) slope += b * g_powers[a] * k_powers[b - 1] * dk;
        moment[t] += w * product;
        moment_slope[t] += w * slope;
      }
    }
    nodes_[n].value = expansion_from_moments(std::log(sum), mean_g, mean_k, moment);
    // The fourth-order products need the chain rule; a one-sided difference of the expansion along the slope is exact
    // to rounding because the expansion is quadratic in the moments: take the central difference.
    constexpr double h = 1e-3;
    std::array<double, terms> ahead = moment;
    std::array<double, terms> behind = moment;
    for (std::size_t t = 3; t < terms; ++t) {
      ahead[t] += h * moment_slope[t];
      behind[t] -= h * moment_slope[t];
    }
    const auto k_ahead = expansion_from_moments(0, 0, 0, ahead);
    const auto k_behind = expansion_from_moments(0, 0, 0, behind);
    for (std::size_t t = 3; t < terms; ++t) nodes_[n].slope[t] = (k_ahead[t] - k_behind[t]) / (2 * h);
    nodes_[n].slope[0] = mean_phi_slope;
    nodes_[n].slope[1] = mean_g_slope;
    nodes_[n].slope[2] = mean_k_slope;
  }
}

BandFlux BandTable::at(double q, double s, double c) const {
  const double u = s - 1;
  const double monomial[terms] = {1,
                                  u,
                                  c,
                                  u * u,
                                  u * c,
                                  c * c,
                                  u * u * u,
                                  u * u * c,
                                  u * c * c,
                                  c * c * c,
                                  u * u * u * u,
                                  u * u * u * c,
                                  u * u * c * c,
                                  u * c * c * c,
                                  c * c * c * c};
  const double by_u[terms] = {
      0, 1, 0, 2 * u, c, 0, 3 * u * u, 2 * u * c, c * c, 0, 4 * u * u * u, 3 * u * u * c, 2 * u * c * c, c * c * c, 0};
  const double by_c[terms] = {
      0, 0, 1, 0, u, 2 * c, 0, u * u, 2 * u * c, 3 * c * c, 0, u * u * u, 2 * u * u * c, 3 * u * c * c, 4 * c * c * c};
  const auto above = std::upper_bound(q_.begin() + 1, q_.end() - 1, q);
  const auto right = static_cast<std::size_t>(above - q_.begin());
  const std::size_t left = right - 1;
  const double width = q_[right] - q_[left];
  double h00 = 0, h10 = 0, h01 = 0, h11 = 0, d00 = 0, d10 = 0, d01 = 0, d11 = 0;
  if (q < q_.front()) {
    h00 = 1;
    h10 = q - q_.front();
    d10 = 1;
  } else if (q > q_.back()) {
    h01 = 1;
    h11 = q - q_.back();
    d11 = 1;
  } else {
    const double t = (q - q_[left]) / width;
    h00 = (1 + 2 * t) * (1 - t) * (1 - t);
    h10 = width * t * (1 - t) * (1 - t);
    h01 = t * t * (3 - 2 * t);
    h11 = width * t * t * (t - 1);
    d00 = 6 * t * (t - 1) / width;
    d10 = (1 - t) * (1 - 3 * t);
    d01 = -d00;
    d11 = t * (3 * t - 2);
  }
  const Node& a = nodes_[left];
  const Node& b = nodes_[right];
  double log_flux = 0;
  double slope = 0;
  double log_s = 0;
  double log_c = 0;
  for (std::size_t t = 0; t < terms; ++t) {
    const double value = h00 * a.value[t] + h10 * a.slope[t] + h01 * b.value[t] + h11 * b.slope[t];
    const double value_slope = d00 * a.value[t] + d10 * a.slope[t] + d01 * b.value[t] + d11 * b.slope[t];
    log_flux += value * monomial[t];
    slope += value_slope * monomial[t];
    log_s += value * by_u[t];
    log_c += value * by_c[t];
  }
  BandFlux out;
  out.flux = std::exp(log_flux);
  out.d_q = out.flux * slope;
  out.d_s = out.flux * log_s;
  out.d_c = out.flux * log_c;
  return out;
}

}  // namespace thirdrung
