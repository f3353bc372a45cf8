#pragma once

#include <Eigen/Core>
#include <string>
#include <vector>

#include "hubbleflow/flow_sample.h"
#include "standardisation/standardisation.h"

namespace thirdrung {

/// One statistical part of the covariance of the standardised magnitudes [mag^2]: light-curve fit, intrinsic scatter,
/// sigma_v, ...
struct CovariancePart {
  std::string name;
  std::string kind = "statistical";
  Eigen::VectorXd diagonal;  ///< Where the part does not correlate supernovae; else empty.
  Eigen::MatrixXd matrix;    ///< Where it does; else empty.
  bool weighs = true;        ///< False: left out of weighting().
};

/// One systematic uncertainty: how every standardised magnitude moves when one input moves by its one-sigma size.
struct SystematicShift {
  std::string name;   ///< Of the input, "zero point north/g".
  std::string kind;   ///< Group in the budget: "zero point", "wavelength", "Milky Way", "template", "redshift", ...
  double size = 1.0;  ///< One sigma of the input, in `unit`.
  std::string unit;
  Eigen::VectorXd shift;  ///< Of the magnitudes, for +1 sigma [mag].
  bool weighs = true;     ///< False: left out of weighting().
};

/// The whole covariance in its parts: C = sum of parts + sum_kl rho_kl Delta_k Delta_l^T.
struct CovarianceModel {
  std::vector<std::string> supernovae;  ///< Names, in the order of every vector and matrix.
  std::vector<CovariancePart> parts;
  std::vector<SystematicShift> systematics;
  Eigen::MatrixXd correlation;  ///< Of the systematics with each other; empty: independent.

  Eigen::MatrixXd statistical() const;  ///< Sum of the parts.
  Eigen::MatrixXd systematic() const;   ///< Sum of the outer products.
  Eigen::MatrixXd total() const;        ///< Both; exactly symmetric.
  /// What least squares should be weighted with: the total without what does not weigh.
  ///
  /// The errors of alpha, beta and gamma do not. They shift the magnitudes along the observed s - 1 and c, and weights
  /// that know of such shifts fit the coefficients anew to the residuals, as an ordinary fit would that ignores the
  /// errors of s and c: a_B then moves by the dilution of those slopes times the mean of s - 1 and c.
  Eigen::MatrixXd weighting() const;
};

/// Throws InputError (naming the part) if a size does not fit the number of supernovae or a value is not finite, or if
/// `correlation` is not a correlation matrix: unit diagonal, symmetric, positive semi-definite.
void check_covariance_model(const CovarianceModel& model);

/// The model of the members alone.
CovarianceModel cut(const CovarianceModel& model, const std::vector<bool>& members);

/// Diagonal part sigma^2 I, of the intrinsic scatter.
CovariancePart constant_part(std::string name, std::size_t supernovae, double sigma);
/// Diagonal part of uncorrelated velocities: (5 velocity_response sigma_v / c)^2, and of redshift errors where given
/// (NaN: none).
CovariancePart velocity_scatter_part(std::span<const FlowSupernova> supernovae, const Expansion& expansion,
                                     double sigma_v, std::span<const double> z_errors = {});

/// The statistical parts of a standardised sample: light-curve fit, intrinsic scatter, uncorrelated velocities with
/// redshift errors.
/// @param magnitudes of the same supernovae in the same order (std::logic_error otherwise).
CovarianceModel statistical_model(std::span<const FlowSupernova> supernovae,
                                  std::span<const StandardisedMagnitude> magnitudes, const Expansion& expansion,
                                  double sigma_v, std::span<const double> z_errors = {});

/// Adds the errors of alpha, beta and gamma, as coefficient_shifts() gives them, under the kind "standardisation"; they
/// do not weigh.
void add_coefficient_shifts(CovarianceModel& model, const Eigen::MatrixXd& shifts);

/// Shift of the magnitudes that a changed input amounts to: minus five times the change of the single intercepts. Takes
/// any change of magnitudes, redshifts or expansion, from a rerun or an analytic step; both lists in one order.
Eigen::VectorXd effective_shift(std::span<const FlowSupernova> baseline, const FlowOptions& flow,
                                std::span<const FlowSupernova> changed, const FlowOptions& changed_flow);
/// Shift for an expansion whose q0 and j0 (flat LCDM: omega_m to match q0) are off by that much.
Eigen::VectorXd expansion_shift(std::span<const FlowSupernova> supernovae, const FlowOptions& flow, double q0_error,
                                double j0_error);
/// Shift for heliocentric redshifts that are all too high by dz: (1 + z) of both redshifts scales with it.
Eigen::VectorXd redshift_shift(std::span<const FlowSupernova> supernovae, const FlowOptions& flow, double dz);

}  // namespace thirdrung
