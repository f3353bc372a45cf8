#pragma once

#include <Eigen/Core>
#include <limits>
#include <span>
#include <string>
#include <vector>

namespace thirdrung {

/// What standardisation needs to know of one supernova. Absent numbers are NaN.
///
/// (m_b, s, c) and their covariance come from the light-curve fit; redshifts and the distance modulus from the rooms
/// below. The modulus may carry any constant (it is taken for an arbitrary H0): only its run with redshift enters, the
/// constant is absorbed by the fitted intercept.
struct StandardisationDatum {
  std::string name;
  std::vector<std::string> surveys;                       ///< Who observed it; more than one after combine_surveys().
  double m_b = std::numeric_limits<double>::quiet_NaN();  ///< Peak B magnitude in the rest frame [mag].
  double s = std::numeric_limits<double>::quiet_NaN();    ///< Stretch.
  double c = std::numeric_limits<double>::quiet_NaN();    ///< Colour [mag].
  Eigen::Matrix3d covariance = Eigen::Matrix3d::Zero();   ///< Of (m_b, s, c), from the light-curve fit alone.
  double host_log_mass = std::numeric_limits<double>::quiet_NaN();  ///< log10 of the stellar mass [solar masses].
  double host_log_mass_error = std::numeric_limits<double>::quiet_NaN();
  double z_helio = std::numeric_limits<double>::quiet_NaN();
  double z_flow = std::numeric_limits<double>::quiet_NaN();
  double modulus =
      std::numeric_limits<double>::quiet_NaN();  ///< Distance modulus at that redshift, any constant [mag].
  double flow_variance = 0.0;  ///< Variance of the modulus from peculiar velocity and redshift error [mag^2].
};

/// Variance of a distance modulus from an uncorrelated peculiar velocity and a redshift error [mag^2]:
/// (5/ln 10)^2 [(sigma_v / (c z))^2 + (z_error / z)^2], the low-redshift limit of d(modulus)/dz.
/// @param sigma_v one-dimensional velocity scatter [km/s].
/// @param z_error error of the redshift; NaN counts as 0.
double flow_variance(double z_flow, double sigma_v, double z_error);

/// The fits of one supernova by several surveys, made one.
struct CombinedDatum {
  StandardisationDatum datum;
  double disagreement_chi2 = 0.0;         ///< Sum over surveys of (x - mean)^T C^-1 (x - mean) for x = (m_b, s, c).
  int disagreement_dof = 0;               ///< 3 (surveys - 1); 0 where one survey observed it.
  double disagreement_probability = 1.0;  ///< Of a chi-square at least as large.
};

/// One datum a supernova: rows with the same name are combined, so that none is counted twice.
///
/// (m_b, s, c) is the mean weighted by the inverse covariance matrices; its covariance the inverse of their sum. The
/// intrinsic scatter belongs to the supernova and is not in these matrices, so that combining does not average it away.
/// What is not measured by the light curve (mass, redshift, modulus) is taken from the first row that has it. Order:
/// first appearance. Throws InputError naming the supernova if a covariance is not positive definite or a value is not
/// finite.
std::vector<CombinedDatum> combine_surveys(std::span<const StandardisationDatum> rows);

/// Throws InputError naming the supernova unless (m_b, s, c, modulus) are finite and the covariance is symmetric and
/// positive definite, and its name occurs once.
void check_data(std::span<const StandardisationDatum> data);

}  // namespace thirdrung
