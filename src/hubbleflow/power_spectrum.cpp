#include "hubbleflow/power_spectrum.h"

#include <cmath>
#include <numbers>

#include "base/constants.h"

namespace thirdrung {

namespace {

/// The fitting form of eq. 19-20 for pressureless matter, shared by cold matter and baryons.
double pressureless(double q, double alpha, double beta) {
  const double c = 14.2 / alpha + 386.0 / (1.0 + 69.9 * std::pow(q, 1.08));
  const double l = std::log(std::numbers::e + 1.8 * beta * q);
  return l / (l + c * q * q);
}

/// Eq. 15.
double suppression(double y) {
  const double root = std::sqrt(1.0 + y);
  return y * (-6.0 * root + (2.0 + 3.0 * y) * std::log((root + 1.0) / (root - 1.0)));
}

double sphere(double x) {
  if (x < 1e-3) return 1.0 - x * x / 10.0;
  return 3.0 * (std::sin(x) - x * std::cos(x)) / (x * x * x);
}

}  // namespace

TransferFunction::TransferFunction(const MatterModel& m) : h_(m.h) {
  const double om = m.omega_m * m.h * m.h;
  const double ob = m.omega_b_h2;
  const double theta = m.t_cmb / 2.7;
  const double theta2 = theta * theta;
  const double theta4 = theta2 * theta2;
  omega_m_h2_ = om;
  baryon_fraction_ = ob / om;
  cdm_fraction_ = 1.0 - baryon_fraction_;
  // Equality and drag (eqs. 2-5); momentum ratio of baryons and photons (eq. 5).
  const double z_equality = 2.50e4 * om / theta4;
  k_equality_ = 7.46e-2 * om / theta2;
  const double b1 = 0.313 * std::pow(om, -0.419) * (1.0 + 0.607 * std::pow(om, 0.674));
  const double b2 = 0.238 * std::pow(om, 0.223);
  z_drag_ = 1291.0 * std::pow(om, 0.251) / (1.0 + 0.659 * std::pow(om, 0.828)) * (1.0 + b1 * std::pow(ob, b2));
  const auto ratio = [&](double z) { return 31.5 * ob / theta4 * 1e3 / z; };
  const double r_drag = ratio(z_drag_);
  const double r_equality = ratio(z_equality);
  sound_horizon_ = 2.0 / (3.0 * k_equality_) * std::sqrt(6.0 / r_equality) *
                   std::log((std::sqrt(1.0 + r_drag) + std::sqrt(r_drag + r_equality)) / (1.0 + std::sqrt(r_equality)));
  k_silk_ = 1.6 * std::pow(ob, 0.52) * std::pow(om, 0.73) * (1.0 + std::pow(10.4 * om, -0.95));
  // Cold matter (eqs. 11-12).
  const double a1 = std::pow(46.9 * om, 0.670) * (1.0 + std::pow(32.1 * om, -0.532));
  const double a2 = std::pow(12.0 * om, 0.424) * (1.0 + std::pow(45.0 * om, -0.582));
  const double fb3 = baryon_fraction_ * baryon_fraction_ * baryon_fraction_;
  alpha_c_ = std::pow(a1, -baryon_fraction_) * std::pow(a2, -fb3);
  const double c1 = 0.944 / (1.0 + std::pow(458.0 * om, -0.708));
  const double c2 = std::pow(0.395 * om, -0.0266);
  beta_c_ = 1.0 / (1.0 + c1 * (std::pow(cdm_fraction_, c2) - 1.0));
  // Baryons (eqs. 14, 23, 24).
  alpha_b_ = 2.07 * k_equality_ * sound_horizon_ * std::pow(1.0 + r_drag, -0.75) *
             suppression((1.0 + z_equality) / (1.0 + z_drag_));
  beta_b_ = 0.5 + baryon_fraction_ + (3.0 - 2.0 * baryon_fraction_) * std::sqrt(std::pow(17.2 * om, 2) + 1.0);
  beta_node_ = 8.41 * std::pow(om, 0.435);
}

double TransferFunction::operator()(double k_h_mpc) const {
  const double k = k_h_mpc * h_;
  if (k <= 0.0) return 1.0;
  const double q = k / (13.41 * k_equality_);
  const double ks = k * sound_horizon_;
  const double f = 1.0 / (1.0 + std::pow(ks / 5.4, 4));
  const double cold = f * pressureless(q, 1.0, beta_c_) + (1.0 - f) * pressureless(q, alpha_c_, beta_c_);
  const double s_tilde = sound_horizon_ / std::cbrt(1.0 + std::pow(beta_node_ / ks, 3));
  const double x = k * s_tilde;
  const double wave = x < 1e-6 ? 1.0 : std::sin(x) / x;
  const double baryons = (pressureless(q, 1.0, 1.0) / (1.0 + std::pow(ks / 5.2, 2)) +
                          alpha_b_ / (1.0 + std::pow(beta_b_ / ks, 3)) * std::exp(-std::pow(k / k_silk_, 1.4))) *
                         wave;
  return baryon_fraction_ * baryons + cdm_fraction_ * cold;
}

PowerSpectrum::PowerSpectrum(const MatterModel& model) : model_(model), transfer_(model) {
  const double unit = sigma(8.0);
  amplitude_ = model.sigma8 * model.sigma8 / (unit * unit);
}

double PowerSpectrum::operator()(double k) const {
  if (k <= 0.0) return 0.0;
  const double t = transfer_(k);
  return amplitude_ * std::pow(k, model_.n_s) * t * t;
}

double PowerSpectrum::sigma(double r) const {
  // Simpson's rule in ln k; 4000 steps resolve the window's ripples to where k^3 P W^2 has died away.
  constexpr int steps = 4000;
  const double low = std::log(1e-6 / r);
  const double high = std::log(500.0 / r);
  const double dx = (high - low) / steps;
  double sum = 0.0;
  for (int i = 0; i <= steps; ++i) {
    const double k = std::exp(low + i * dx);
    const double w = sphere(k * r);
    const double weight = i == 0 || i == steps ? 1.0 : (i % 2 == 1 ? 4.0 : 2.0);
    sum += weight * k * k * k * (*this)(k)*w * w;
  }
  return std::sqrt(sum * dx / 3.0 / (2.0 * constants::pi * constants::pi));
}

double hubble_ratio(double z, const MatterModel& m) {
  return std::sqrt(m.omega_m * std::pow(1.0 + z, 3) + 1.0 - m.omega_m);
}

double growth_rate(double z, const MatterModel& m) {
  const double e = hubble_ratio(z, m);
  return std::pow(m.omega_m * std::pow(1.0 + z, 3) / (e * e), 0.55);
}

double growth_factor(double z, const MatterModel& m) {
  constexpr int steps = 64;  // Simpson in ln(1 + z): exact to 1e-10 for z < 1.
  const double dx = std::log1p(z) / steps;
  double sum = 0.0;
  for (int i = 0; i <= steps; ++i) {
    const double weight = i == 0 || i == steps ? 1.0 : (i % 2 == 1 ? 4.0 : 2.0);
    sum += weight * growth_rate(std::expm1(i * dx), m);
  }
  return std::exp(-sum * dx / 3.0);
}

}  // namespace thirdrung
