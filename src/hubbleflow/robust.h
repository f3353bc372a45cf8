#pragma once

#include <string>
#include <vector>

#include "hubbleflow/scan_frame.h"

namespace thirdrung {

/// A supernova that a robust estimate does not take at its word.
struct Mistrusted {
  std::string supernova;
  double pull = 0.0;    ///< Residual over its error.
  double weight = 0.0;  ///< Kept of its information: 0 if rejected.
};

/// A robust intercept beside the baseline.
struct RobustResult {
  std::string method;
  std::size_t supernovae = 0;
  double a_b = 0.0;
  double error = 0.0;  ///< Of the estimate with its weights taken as given.
  double delta_ab = 0.0;
  double delta_ab_error = 0.0;  ///< Of the difference, likewise.
  std::vector<Mistrusted> mistrusted;
  int rounds = 0;
};

/// Chauvenet's criterion (Chauvenet 1863, A Manual of Spherical and Practical Astronomy, vol. 2, p. 564): rejects a
/// supernova if fewer than half a one of n is expected to lie as far out as it does; refits and repeats until nothing
/// more goes. Pulls are residuals over the root of the covariance's diagonal.
RobustResult chauvenet(const ScanFrame& frame);

/// Settings of the Student-t likelihood.
struct StudentOptions {
  double degrees_of_freedom =
      4.0;  ///< Lange, Little & Taylor 1989, J. Am. Stat. Assoc. 84, 881, recommend 4 where it is not fitted.
  /// Mistrusted if less than this is kept of a supernova's information, compared with one on the relation: 1/3 is
  /// reached at sqrt(2 nu) scale errors, 2.8 for nu = 4.
  double mistrust_below = 1.0 / 3.0;
  int most_rounds = 200;
};

/// Student-t likelihood: each supernova's own noise has heavy tails, what is common to several stays normal.
///
/// y = A theta + g + e, e_i = sigma_i t_nu with sigma_i^2 the own variance, g normal with the rest of the covariance.
/// Solved by expectation-maximisation with u_i = (nu + 1)/(nu + <e_i^2>/sigma_i^2): exact where g = 0; else <e_i^2> is
/// the mean square of e_i given the data and u. Error and difference treat the final weights as given.
/// @param own_variance [mag^2], one for every supernova of the frame's sample, with covariance - diag(own_variance)
/// positive semi-definite.
RobustResult student_t(const ScanFrame& frame, const Eigen::VectorXd& own_variance, const StudentOptions& options = {});

/// The part of each variance that no other supernova shares, from the covariance alone [mag^2]: t / P_ii, P the
/// precision, 1/P_ii the variance of i when all others are known, and t (just below 1 as a rule) the largest factor
/// that leaves the rest positive semi-definite.
Eigen::VectorXd own_variance(const ScanFrame& frame);

/// Both as scan rows; the caution lists whom they mistrust.
std::vector<ScanRow> robust_rows(const ScanFrame& frame);
ScanRow robust_row(const RobustResult& result);

}  // namespace thirdrung
