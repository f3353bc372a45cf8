#pragma once

#include <Eigen/Core>
#include <optional>
#include <vector>

#include "hubbleflow/flow_sample.h"

namespace thirdrung {

/// Settings of the intercept.
struct InterceptOptions {
  FlowOptions flow;
  double z_min = 0.0233;  ///< Of z_flow, exclusive (Riess et al. 2016, ApJ 826, 56, sect. 4.2; 2022, ApJL 934, L7).
  double z_max = 0.15;
  bool fit_q0 = false;      ///< Free q0 (omega_m for flat LCDM) together with a_B; j0 stays.
  bool fit_dipole = false;  ///< A velocity common to all supernovae of the sample, in the CMB frame, together with a_B.
  std::size_t fewest = 10;  ///< Supernovae that a result needs.
};

/// A velocity of the whole sample against the CMB frame.
struct FlowDipole {
  Eigen::Vector3d velocity = Eigen::Vector3d::Zero();    ///< ICRS Cartesian [km/s].
  Eigen::Matrix3d covariance = Eigen::Matrix3d::Zero();  ///< [(km/s)^2].
  double amplitude = 0.0;  ///< Length [km/s]; of noise alone it is not 0 but about 1.6 times an error of one component.
  double amplitude_error = 0.0;         ///< Along the direction found.
  double l = 0.0, b = 0.0;              ///< Galactic direction [deg].
  double l_error = 0.0, b_error = 0.0;  ///< [deg]; l_error in longitude itself, not times cos b.
  double chi2 = 0.0;                    ///< velocity^T covariance^-1 velocity, three degrees of freedom.
  double probability = 1.0;             ///< That no velocity gives a chi2 as large.
};

/// The intercept of the magnitude-redshift relation.
struct InterceptResult {
  double a_b = 0.0;
  double error = 0.0;
  std::size_t supernovae = 0;
  double chi2 = 0.0;
  int dof = 0;
  double probability = 1.0;  ///< Of a chi-square at least as large.
  double scatter_mag = 0.0;  ///< Root mean square of the residuals [mag], unweighted.
  std::vector<bool> used;    ///< Of the given sample.
  /// For the used supernovae, in the sample's order:
  Eigen::VectorXd weights;          ///< a_B = weights . single intercepts; sum 1.
  Eigen::VectorXd single;           ///< Single intercepts.
  Eigen::VectorXd residuals;        ///< m_b_standardised minus the relation [mag]: positive is faint.
  Eigen::VectorXd residual_errors;  ///< Square root of the covariance's diagonal [mag].
  std::optional<double> q0, q0_error, q0_correlation;  ///< Where fitted; correlation with a_B.
  std::optional<FlowDipole> dipole;
};

/// a_B by generalised least squares with the sample's full covariance over the supernovae in the redshift range.
///
/// a_B = 1^T P y / 1^T P 1 with y the single intercepts and P the inverse of 0.04 times the sample's weighting; with q0
/// or a dipole the same with their columns, q0 iterated to convergence. Errors are those of these linear estimates
/// under the whole covariance; chi2 is that of P. Throws InputError for an unsound sample
/// (check_flow_sample) or a covariance that is not positive definite; NoResultError if fewer than `fewest` supernovae
/// are in the range; InputError for a dipole if a supernova has no position.
InterceptResult fit_intercept(const FlowSample& sample, const InterceptOptions& options = {});

/// Columns of the linear model: ones, then d(-y)/dq0 if free, then the three velocity components [per km/s] if free.
Eigen::MatrixXd intercept_design(std::span<const FlowSupernova> supernovae, const InterceptOptions& options);

}  // namespace thirdrung
