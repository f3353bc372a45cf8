#pragma once

#include <Eigen/Core>
#include <span>
#include <vector>

#include "hubbleflow/flow_sample.h"
#include "hubbleflow/power_spectrum.h"

namespace thirdrung {

/// Settings of the covariance of radial peculiar velocities.
struct VelocityCovarianceOptions {
  MatterModel matter;
  /// Gaussian smoothing of the density, exp(-k^2 R^2 / 2) on the field [Mpc/h]. Below about this scale linear theory
  /// overstates coherence; what smoothing removes is left to the uncorrelated sigma_v.
  double smoothing = 4.0;
  /// Scale of all velocities: 1 for the whole field; for residuals of a subtracted field its residual amplitude.
  double amplitude = 1.0;
  int threads = 0;
};

/// The two correlation functions of the peculiar velocity field today, along and across the separation [(km/s)^2].
///
/// Psi_par(r) = (100 f)^2 int dk P(k) W^2 [j0(kr) - 2 j1(kr)/(kr)] / (2 pi^2), Psi_perp(r) = the same with j1(kr)/(kr)
/// (Gorski 1988, ApJ 332, L7), velocities in km/s for k in h/Mpc. Tabulated once in r and interpolated with cubic
/// Hermite polynomials; the table is good to 1e-5 of Psi(0).
class VelocityCorrelation {
 public:
  explicit VelocityCorrelation(const VelocityCovarianceOptions& options = {}, double largest_separation = 1500.0);
  double along(double r_mpc_h) const;
  double across(double r_mpc_h) const;
  /// Variance of one component, Psi(0) = (100 f)^2 int dk P W^2 / (6 pi^2) [(km/s)^2].
  double variance() const { return along_.front(); }

 private:
  double interpolate(const std::vector<double>& value, const std::vector<double>& slope, double r) const;
  double step_;
  std::vector<double> along_, across_, along_slope_, across_slope_;
};

/// Covariance of the radial velocities of the supernovae [(km/s)^2], including growth with redshift.
///
/// <v_i v_j> = g_i g_j [sin a_i sin a_j Psi_perp(r) + cos a_i cos a_j Psi_par(r)], a the angles between the lines of
/// sight and the separation vector, g = D'(z)/D'(0), D' = D f H/(1 + z) (Hui & Greene 2006, Phys. Rev. D 73, 123526;
/// Davis et al. 2011, ApJ 741, 67). Comoving distances in flat LCDM of the same matter density.
Eigen::MatrixXd radial_velocity_covariance(std::span<const FlowSupernova> supernovae,
                                           const VelocityCovarianceOptions& options);

/// The same as a covariance of standardised magnitudes [mag^2]: times (5 velocity_response / c) of both supernovae.
/// Throws InputError if a supernova has no position.
Eigen::MatrixXd velocity_covariance(std::span<const FlowSupernova> supernovae, const Expansion& expansion,
                                    const VelocityCovarianceOptions& options = {});

}  // namespace thirdrung
