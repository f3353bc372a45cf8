#pragma once

#include <Eigen/Core>
#include <cstddef>
#include <optional>
#include <span>
#include <string>
#include <vector>

#include "standardisation/datum.h"
#include "standardisation/host_mass.h"

namespace thirdrung {

/// One fitted (or held) number of the standardisation.
struct StandardisationParameter {
  std::string name;  ///< alpha, beta, gamma, sigma_int, s_mean, s_width, c_mean, c_width, intercept; means with
                     ///< "[survey]" if per survey.
  double value = 0.0;
  double error = 0.0;  ///< 0 if held.
  bool held = false;   ///< Fixed by the user, or because the data cannot tell (then a remark says so).
};

/// One standardised supernova: m_b + alpha (s - 1) - beta c + gamma (P - 1/2) [mag].
struct StandardisedMagnitude {
  std::string name;
  double mass_probability = 0.5;
  double magnitude = 0.0;
  double fit_variance = 0.0;        ///< a^T C a of the light-curve covariance, a = (1, alpha, -beta) [mag^2].
  double intrinsic_variance = 0.0;  ///< sigma_int^2 + gamma^2 P (1 - P) [mag^2].
  double selection_bias = 0.0;      ///< Taken off the magnitude (selection.h) [mag].
  /// The same with the true s and c taken at their most probable given the supernova and its population, rather than as
  /// observed: less noise where s and c are poorly measured, at the price of leaning on the population.
  double shrunk_magnitude = 0.0;
  double shrunk_variance = 0.0;  ///< Its whole variance about the relation: fit, population and intrinsic [mag^2].
  double variance() const { return fit_variance + intrinsic_variance; }
};

/// What a standardisation found.
struct StandardisationResult {
  std::vector<StandardisationParameter> parameters;
  Eigen::MatrixXd covariance;  ///< Of the parameters, in their order; zero rows where held.
  double minus_two_ln_likelihood = 0.0;
  double chi2 = 0.0;  ///< At the maximum; three numbers a supernova for the hierarchical fit, one for the ordinary.
  std::size_t supernovae = 0;
  std::vector<StandardisedMagnitude> magnitudes;  ///< In the order of the data.
  double lost_variance = 0.0;        ///< Intrinsic variance that a magnitude limit hides from the sample [mag^2].
  std::vector<std::string> remarks;  ///< Each a sentence for the user.

  /// Value of a parameter; throws std::logic_error if there is none of that name.
  double value(const std::string& name) const;
  double error(const std::string& name) const;
};

/// alpha, beta, gamma, sigma_int and the intercept of the relation as plain numbers.
struct StandardisationCoefficients {
  double alpha = 0.0, beta = 0.0, gamma = 0.0, sigma_int = 0.0;
  // For the correction for selection alone:
  double intercept = 0.0;
  double lost_variance = 0.0;  ///< As in StandardisationResult.
};
StandardisationCoefficients coefficients(const StandardisationResult& result);

/// Standardised magnitudes with given coefficients; the shrunk ones equal the plain ones. Used with held coefficients.
std::vector<StandardisedMagnitude> standardise(std::span<const StandardisationDatum> data,
                                               const StandardisationCoefficients& coefficients,
                                               const HostMassOptions& host_mass);

/// Shift of every standardised magnitude per principal direction of the errors of (alpha, beta, gamma): columns whose
/// outer products sum to J Sigma J^T, the covariance that the coefficients' errors give all magnitudes together [mag].
Eigen::MatrixXd coefficient_shifts(std::span<const StandardisationDatum> data, const StandardisationResult& result,
                                   const HostMassOptions& host_mass);

}  // namespace thirdrung
