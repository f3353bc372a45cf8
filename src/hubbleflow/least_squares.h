#pragma once

#include <Eigen/Core>

namespace thirdrung {

/// Generalised least squares of y = A theta + noise with the noise's precision matrix P (inverse covariance) known.
struct LeastSquares {
  Eigen::VectorXd theta;
  Eigen::MatrixXd covariance;  ///< (A^T P A)^-1.
  Eigen::MatrixXd weights;     ///< (A^T P A)^-1 A^T P: theta = weights y. Row 0 sums to 1 if column 0 of A is ones.
  Eigen::VectorXd residuals;   ///< y - A theta.
  double chi2 = 0.0;
};

/// (Aitken 1936, Proc. R. Soc. Edinburgh 55, 42.) Throws std::logic_error if the shapes do not fit.
LeastSquares solve_least_squares(const Eigen::MatrixXd& design, const Eigen::VectorXd& y,
                                 const Eigen::MatrixXd& precision);

}  // namespace thirdrung
