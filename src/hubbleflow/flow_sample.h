#pragma once

#include <Eigen/Core>
#include <limits>
#include <span>
#include <string>
#include <vector>

#include "sky/expansion.h"

namespace thirdrung {

/// One standardised supernova of the Hubble flow. Absent numbers are NaN; only those that a scan uses need be there.
struct FlowSupernova {
  std::string name;
  std::vector<std::string> surveys;
  double ra = std::numeric_limits<double>::quiet_NaN();                ///< ICRS [deg].
  double dec = std::numeric_limits<double>::quiet_NaN();               ///< ICRS [deg].
  double z_helio = std::numeric_limits<double>::quiet_NaN();           ///< As observed, from the Sun.
  double z_flow = std::numeric_limits<double>::quiet_NaN();            ///< CMB frame, peculiar velocity taken out.
  double m_b_standardised = std::numeric_limits<double>::quiet_NaN();  ///< [mag].
  double s = std::numeric_limits<double>::quiet_NaN();
  double c = std::numeric_limits<double>::quiet_NaN();
  double host_log_mass = std::numeric_limits<double>::quiet_NaN();
  double peak_mjd = std::numeric_limits<double>::quiet_NaN();
};

/// Supernovae with the covariance of their standardised magnitudes.
///
/// The covariance [mag^2] takes in everything that moves a supernova about the relation: light-curve fit, intrinsic
/// scatter, peculiar velocity, systematics; its order is that of the supernovae.
struct FlowSample {
  std::vector<FlowSupernova> supernovae;
  Eigen::MatrixXd covariance;
  /// What the weights of least squares are made from [mag^2]; empty: the covariance. It leaves out what must count in
  /// every error but must not be fitted away (CovarianceModel::weighting).
  Eigen::MatrixXd weighting = {};

  const Eigen::MatrixXd& weighed_by() const { return weighting.size() > 0 ? weighting : covariance; }
};

/// How magnitudes and redshifts become single-supernova intercepts.
struct FlowOptions {
  Expansion expansion;
  /// Take the distance as (1 + z_helio)/(1 + z_flow) d_L(z_flow). Off, d_L(z_flow) alone, as in the formula of Riess et
  /// al. 2016.
  bool helio_factor = true;
};

/// log10(c H0 d_L/c) - 0.2 m_b_standardised of every supernova: the intercept that it alone gives (Riess et al. 2016,
/// ApJ 826, 56, eq. 5).
Eigen::VectorXd single_intercepts(std::span<const FlowSupernova> supernovae, const FlowOptions& options);

/// Change of a single intercept per velocity away from us that z_flow still contains, in units of c: (1 + z) d(log
/// term)/dz
/// - 2/ln 10. The shift of d_L at fixed observed redshift is v/c (1 - (1 + z)^2 / (H d_L)) (Hui & Greene 2006, Phys.
/// Rev. D 73, 123526, eq. 15 with the observer at rest in the CMB frame).
double velocity_response(double z_flow, const Expansion& expansion);

/// Throws InputError unless: every supernova has 0 < z_flow and a finite magnitude, names occur once, the covariance is
/// square, of the sample's size, finite, symmetric to 1e-8 of its largest element and with positive diagonal, and so is
/// the weighting, if there is one. (Positive definiteness is found when it is inverted; see precision_matrix.)
void check_flow_sample(const FlowSample& sample);

/// Inverse of a covariance. Throws InputError naming the supernova that weighs most in the offending combination, if it
/// is not positive definite.
Eigen::MatrixXd precision_matrix(const Eigen::MatrixXd& covariance, std::span<const FlowSupernova> supernovae);

/// The supernovae with z_min < z_flow < z_max.
std::vector<bool> in_redshift_range(std::span<const FlowSupernova> supernovae, double z_min, double z_max);

/// Places of the members.
std::vector<Eigen::Index> places_of(const std::vector<bool>& members);

/// The sample cut to its members, covariance with it.
FlowSample cut(const FlowSample& sample, const std::vector<bool>& members);

/// `covariance` brought from the order of `ids` to that of the sample. Throws InputError naming the ids that are
/// missing, or unknown.
Eigen::MatrixXd in_order_of(std::span<const FlowSupernova> supernovae, std::span<const std::string> ids,
                            const Eigen::MatrixXd& covariance, const std::string& file);

}  // namespace thirdrung
