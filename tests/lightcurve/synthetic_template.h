#pragma once

#include <Eigen/Dense>
#include <cmath>
#include <functional>
#include <vector>

#include "base/constants.h"
#include "template/interpolation.h"
#include "template/spectral_template.h"

namespace thirdrung::testing {

/// Every n-th point from `first` to `last`, both included.
inline std::vector<double> regular(double first, double last, double step) {
  std::vector<double> out;
  const auto count = static_cast<int>(std::lround((last - first) / step));
  for (int i = 0; i <= count; ++i) out.push_back(first + step * i);
  return out;
}

inline Eigen::MatrixXd fit_surface(const CubicBasis& phase, const CubicBasis& wavelength,
                                   const std::function<double(double, double)>& f) {
  const auto p = phase.centres();
  const auto l = wavelength.centres();
  Eigen::MatrixXd value(phase.size(), wavelength.size());
  for (int i = 0; i < phase.size(); ++i) {
    for (int j = 0; j < wavelength.size(); ++j) {
      value(i, j) = f(p[static_cast<std::size_t>(i)], l[static_cast<std::size_t>(j)]);
    }
  }
  return interpolate(phase, wavelength, value);
}

/// A triangle in wavelength.
inline double triangle(double wavelength, double centre, double half_width) {
  return std::max(0.0, 1 - std::abs(wavelength - centre) / half_width);
}

/// Invented log flux that rises, falls, and has a second maximum in the red and broad absorption features that deepen
/// and move with time. Not a real supernova's, only as rough.
inline double invented_log_flux(double q, double wavelength) {
  const double x = (wavelength - 4400) / 1000;
  const double peak = 0.9 * x - 0.1 * x * x;
  const double since = q - peak;
  const double rise = 17.5 + 0.8 * x;
  const double decline = 0.105 - 0.018 * x;
  double shape = since < 0 ? -3.2 * (since / rise) * (since / rise) - 1.5 * std::pow(std::abs(since) / rise, 6)
                           : -decline * since * since / (since + 9);
  shape += 0.9 * std::exp(-0.5 * std::pow((q - 27) / 8, 2)) / (1 + std::exp(-(wavelength - 7000) / 500));
  const double colour = -0.55 * x * x / (1 + 0.15 * x) - 1.2 * std::exp(-(wavelength - 2800) / 500) -
                        0.02 * std::max(0.0, q) / (1 + std::exp((wavelength - 4600) / 300));
  double lines = 0;
  const double centres[] = {3750, 4300, 4900, 5450, 6150, 7600, 8200};
  const double depths[] = {0.9, 0.35, 0.4, 0.3, 0.6, 0.35, 0.7};
  for (int k = 0; k < 7; ++k) {
    const double at = centres[k] + 2.0 * q;
    lines -= depths[k] * (1 + 0.01 * q) * std::exp(-0.5 * std::pow((wavelength - at) / (60 + 0.01 * centres[k]), 2));
  }
  return shape + colour + lines;
}

/// A template of that log flux with smooth Γ, K, scatter, and gauge passbands of triangles at B and V; its gauge holds
/// to about 0.01.
inline SpectralTemplate synthetic_template() {
  SpectralTemplate out;
  out.name = "synthetic";
  out.phase_basis = CubicBasis(regular(-20, 60, 2.5));
  out.wavelength_basis = CubicBasis(regular(2600, 10000, 50));
  out.stretch_phase_basis = CubicBasis(regular(-20, 60, 8));
  out.stretch_wavelength_basis = CubicBasis(regular(2600, 10000, 370));
  out.colour_basis = CubicBasis(regular(2600, 10000, 925));
  out.phase_min = -18;
  out.phase_max = 50;
  out.wavelength_min = 3000;
  out.wavelength_max = 9200;
  for (double w = 3400; w <= 6600; w += 10) {
    out.gauge_wavelength.push_back(w);
    out.gauge_weight_b.push_back(triangle(w, 4400, 800));
    out.gauge_weight_v.push_back(triangle(w, 5450, 900));
  }
  // φ is then about 6e-9 erg/s/cm2/Å in B at peak, as of a star of magnitude 0.
  double sum = 0;
  for (std::size_t j = 0; j < out.gauge_wavelength.size(); ++j) {
    sum += out.gauge_weight_b[j] * std::exp(invented_log_flux(0, out.gauge_wavelength[j]));
  }
  const double level = std::log(6.3e-9 * 80 / sum);
  out.log_flux = fit_surface(out.phase_basis, out.wavelength_basis,
                             [&](double q, double w) { return level + invented_log_flux(q, w); });
  const double zero = 1 / (6.3e-9 * 80);
  for (double& w : out.gauge_weight_b) w *= zero;
  for (double& w : out.gauge_weight_v) w *= zero * 1.6;
  out.stretch_response = fit_surface(out.stretch_phase_basis, out.stretch_wavelength_basis, [](double q, double w) {
    const double x = (w - 4400) / 1000;
    return 0.25 * x * (1 - 0.3 * x) + 0.012 * q * x +
           0.6 * std::exp(-0.5 * std::pow((q - 25) / 10, 2)) * x / (1 + x * x);
  });
  const CubicBasis& colour = out.colour_basis;
  Eigen::VectorXd k(colour.size());
  for (int i = 0; i < colour.size(); ++i) {
    const double micron = colour.centres()[static_cast<std::size_t>(i)] / 1e4;
    k(i) = 2.29 * (1 / micron - 1 / 0.4400) + 0.05 * std::pow(1 / micron - 1 / 0.44, 2);
  }
  out.colour_law = collocation(colour).partialPivLu().solve(k);
  out.scatter_phase = {-15, -5, 5, 20, 45};
  out.scatter_wavelength = {3000, 4400, 6500, 9000};
  out.log_epoch_scatter.resize(5, 4);
  for (Eigen::Index i = 0; i < 5; ++i) {
    for (Eigen::Index j = 0; j < 4; ++j) {
      out.log_epoch_scatter(i, j) =
          std::log(0.02 + 0.01 * std::abs(static_cast<double>(i) - 1.5) + (j == 0 ? 0.03 : 0.0));
    }
  }
  out.colour_scatter_wavelength = {3000, 3600, 4400, 6500, 9000};
  out.log_colour_scatter.resize(5);
  out.log_colour_scatter << std::log(0.08), std::log(0.04), std::log(0.015), std::log(0.015), std::log(0.03);
  return out;
}

}  // namespace thirdrung::testing
