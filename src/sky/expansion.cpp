#include "sky/expansion.h"

#include <array>
#include <cmath>
#include <numbers>

#include "base/constants.h"

namespace thirdrung {
namespace {

// Gauss-Legendre nodes and weights of order 10 on (−1, 1), positive half (Abramowitz & Stegun 1964, table 25.4).
constexpr std::array<double, 5> nodes = {0.148874338981631, 0.433395394129247, 0.679409568299024, 0.865063366688985,
                                         0.973906528517172};
constexpr std::array<double, 5> weights = {0.295524224714753, 0.269266719309996, 0.219086362515982, 0.149451349150581,
                                           0.066671344308688};

double inverse_hubble_rate(double z, double omega_m) {
  const double a = 1.0 + z;
  return 1.0 / std::sqrt(omega_m * a * a * a + 1.0 - omega_m);
}

// Steps of at most 0.25 in z keep the quadrature below 1e-13 relative.
double lcdm_comoving(double z, double omega_m) {
  const int steps = 1 + static_cast<int>(std::abs(z) / 0.25);
  const double half = 0.5 * z / steps;
  double sum = 0.0;
  for (int i = 0; i < steps; ++i) {
    const double middle = (2 * i + 1) * half;
    for (std::size_t k = 0; k < nodes.size(); ++k) {
      sum += weights[k] * (inverse_hubble_rate(middle - half * nodes[k], omega_m) +
                           inverse_hubble_rate(middle + half * nodes[k], omega_m));
    }
  }
  return half * sum;
}

double series_cubic(const Expansion& e) {
  return (1.0 - e.q0 - 3.0 * e.q0 * e.q0 + e.j0) / 6.0;
}

}  // namespace

double luminosity_distance(double z, const Expansion& expansion) {
  if (expansion.form == Expansion::Form::flat_lcdm) return (1.0 + z) * lcdm_comoving(z, expansion.omega_m);
  return z * (1.0 + z * (0.5 * (1.0 - expansion.q0) - z * series_cubic(expansion)));
}

double luminosity_distance(double z_flow, double z_helio, const Expansion& expansion) {
  return (1.0 + z_helio) / (1.0 + z_flow) * luminosity_distance(z_flow, expansion);
}

double comoving_distance(double z, const Expansion& expansion) {
  return luminosity_distance(z, expansion) / (1.0 + z);
}

double comoving_distance_mpc_h(double z, const Expansion& expansion) {
  return constants::speed_of_light_km_s / 100.0 * comoving_distance(z, expansion);
}

double log_expansion_term(double z, const Expansion& expansion) {
  return std::log10(constants::speed_of_light_km_s * luminosity_distance(z, expansion));
}

double log_expansion_slope(double z, const Expansion& expansion) {
  const double distance = luminosity_distance(z, expansion);
  double slope = 0.0;
  if (expansion.form == Expansion::Form::flat_lcdm) {
    slope = distance / (1.0 + z) + (1.0 + z) * inverse_hubble_rate(z, expansion.omega_m);
  } else {
    slope = 1.0 + z * ((1.0 - expansion.q0) - 3.0 * z * series_cubic(expansion));
  }
  return slope / distance / std::numbers::ln10;
}

}  // namespace thirdrung
