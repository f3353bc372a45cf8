#include "training/crude_start.h"

#include <Eigen/LU>
#include <array>
#include <cmath>

#include "base/constants.h"

namespace thirdrung {

namespace {

constexpr std::size_t phases = 13;
constexpr std::size_t bands = 6;
constexpr std::array<double, phases> phase = {-20, -15, -10, -5, 0, 5, 10, 15, 20, 25, 30, 40, 55};
/// Wavelengths [angstrom] and ln of a rough peak flux density relative to B.
constexpr std::array<double, bands> wavelength = {2600, 3600, 4400, 5500, 6500, 8000};
constexpr std::array<double, bands> peak = {-1.6, 0.0, 0.0, -0.55, -1.1, -1.95};
/// Magnitudes below peak, from memory and to about 0.1 mag: a start, not a result.
constexpr std::array<std::array<double, bands>, phases> decline = {{{5.0, 5.0, 5.0, 5.0, 5.0, 5.0},
                                                                    {3.2, 3.0, 2.8, 2.8, 2.7, 2.6},
                                                                    {0.7, 0.8, 0.9, 0.9, 0.8, 0.7},
                                                                    {0.0, 0.1, 0.2, 0.25, 0.2, 0.1},
                                                                    {0.1, 0.0, 0.0, 0.0, 0.0, 0.0},
                                                                    {0.7, 0.4, 0.1, 0.0, 0.0, 0.2},
                                                                    {1.4, 1.0, 0.5, 0.2, 0.3, 0.45},
                                                                    {2.0, 1.7, 1.1, 0.5, 0.55, 0.5},
                                                                    {2.6, 2.4, 1.7, 0.8, 0.65, 0.35},
                                                                    {3.0, 2.9, 2.2, 1.1, 0.75, 0.3},
                                                                    {3.3, 3.2, 2.6, 1.4, 1.0, 0.5},
                                                                    {3.7, 3.5, 3.0, 2.0, 1.6, 1.2},
                                                                    {3.9, 3.7, 3.2, 2.5, 2.2, 1.9}}};

template <std::size_t N>
std::pair<std::size_t, double> place(const std::array<double, N>& nodes, double x) {
  std::size_t left = 0;
  while (left + 2 < N && x > nodes[left + 1]) ++left;
  return {left, std::clamp((x - nodes[left]) / (nodes[left + 1] - nodes[left]), -0.0, 1.6)};
}

double rough_log_flux(double p, double lambda) {
  const auto [i, along] = place(phase, p);
  const auto [k, across] = place(wavelength, lambda);
  const auto value = [&](std::size_t a, std::size_t b) { return peak[b] - constants::ln_flux_per_mag * decline[a][b]; };
  const double low = (1 - across) * value(i, k) + across * value(i, k + 1);
  const double high = (1 - across) * value(i + 1, k) + across * value(i + 1, k + 1);
  return (1 - along) * low + along * high;
}

/// Rough reddening: A(λ) − A(B) per unit E(B−V), close to 3.1/λ[µm]-like between U and I.
double rough_colour(double lambda) {
  return 2.44 * (1e4 / lambda - 1e4 / 4400) / (1e4 / 4400 - 1e4 / 5500) * 0.41;
}

}  // namespace

void crude_start(SpectralTemplate& model) {
  const auto p = model.phase_basis.centres();
  const auto w = model.wavelength_basis.centres();
  model.log_flux.resize(model.phase_basis.size(), model.wavelength_basis.size());
  for (std::size_t i = 0; i < p.size(); ++i) {
    for (std::size_t k = 0; k < w.size(); ++k) {
      model.log_flux(static_cast<Eigen::Index>(i), static_cast<Eigen::Index>(k)) = rough_log_flux(p[i], w[k]);
    }
  }
  model.stretch_response.setZero(model.stretch_phase_basis.size(), model.stretch_wavelength_basis.size());
  const auto colours = model.colour_basis.centres();
  model.colour_law.resize(model.colour_basis.size());
  for (std::size_t k = 0; k < colours.size(); ++k)
    model.colour_law(static_cast<Eigen::Index>(k)) = rough_colour(colours[k]);
  model.log_flux.array() += constants::ln_flux_per_mag * model.b_magnitude(0);
}

}  // namespace thirdrung
