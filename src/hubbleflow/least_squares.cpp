#include "hubbleflow/least_squares.h"

#include <Eigen/Cholesky>
#include <stdexcept>

namespace thirdrung {

LeastSquares solve_least_squares(const Eigen::MatrixXd& design, const Eigen::VectorXd& y,
                                 const Eigen::MatrixXd& precision) {
  if (design.rows() != y.size() || precision.rows() != y.size())
    throw std::logic_error("least squares of unequal lengths");
  const Eigen::MatrixXd pa = precision * design;
  const Eigen::MatrixXd normal = design.transpose() * pa;
  const Eigen::LDLT<Eigen::MatrixXd> factor(normal);
  LeastSquares result;
  result.covariance = factor.solve(Eigen::MatrixXd::Identity(normal.rows(), normal.cols()));
  result.weights = factor.solve(pa.transpose());
  result.theta = result.weights * y;
  result.residuals = y - design * result.theta;
  result.chi2 = result.residuals.dot(precision * result.residuals);
  return result;
}

}  // namespace thirdrung
