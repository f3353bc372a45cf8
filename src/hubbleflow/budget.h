#pragma once

#include <Eigen/Core>
#include <string>
#include <vector>

#include "hubbleflow/covariance_model.h"

namespace thirdrung {

/// What one source contributes to the error of a_B.
struct BudgetRow {
  std::string source;
  std::string kind;
  double size = 0.0;  ///< One sigma of the input; 0 for statistical parts.
  std::string unit = {};
  double ab_contribution = 0.0;    ///< sigma(a_B) of this source alone.
  double mag_contribution = 0.0;   ///< Five times that [mag].
  double h0_percent = 0.0;         ///< 100 ln 10 times that: percent of H0.
  double variance_share = 0.0;     ///< Of the variance of a_B, half of every correlation counted here; can be negative.
  double with_correlations = 0.0;  ///< The same as sigma(a_B), with the sign of the share.
};

/// The error of a_B taken apart.
struct Budget {
  std::vector<BudgetRow> rows;  ///< Largest share first.
  std::vector<BudgetRow>
      by_kind;         ///< The same, sources of one kind put together with their correlations among each other.
  double error = 0.0;  ///< sigma(a_B): the root of the sum of variance shares.
  double error_stat = 0.0;
  double error_sys = 0.0;
};

/// For weights w on the supernovae (sum 1), variance(a_B) = 0.04 w^T C w falls into w^T M w of each statistical part M
/// and q_k sum_l rho_kl q_l of each systematic, q_k = w . Delta_k. Exact for any weights, so also for those that C
/// itself gave.
Budget make_budget(const CovarianceModel& model, const Eigen::VectorXd& weights);

/// d a_B / d input, of every systematic's input: which calibration to improve next.
struct InputDerivative {
  std::string input;
  std::string unit;  ///< Of the input; the derivative is per this unit.
  double d_ab = 0.0;
};
std::vector<InputDerivative> input_derivatives(const CovarianceModel& model, const Eigen::VectorXd& weights);

}  // namespace thirdrung
