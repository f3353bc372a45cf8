#include "ladder/solve_ladder.h"

#include <Eigen/Cholesky>
#include <cmath>
#include <numbers>

#include "base/chi_square.h"
#include "base/error.h"
#include "hubbleflow/least_squares.h"

namespace thirdrung {

namespace {

Eigen::MatrixXd inverse(const Eigen::MatrixXd& weighting) {
  const Eigen::LLT<Eigen::MatrixXd> factor(weighting);
  if (factor.info() != Eigen::Success) {
    throw InputError({"the ladder", std::nullopt, ""}, "its covariance is not positive definite",
                     "check the variances of its magnitudes");
  }
  return factor.solve(Eigen::MatrixXd::Identity(weighting.rows(), weighting.cols()));
}

/// w^T M w of a part, with only the rows from `first` on, `count` of them.
double variance(const CovariancePart& part, const Eigen::VectorXd& w, Eigen::Index first, Eigen::Index count) {
  const auto v = w.segment(first, count);
  double sum = 0.0;
  if (part.diagonal.size() > 0) sum += v.cwiseAbs2().dot(part.diagonal.segment(first, count));
  if (part.matrix.size() > 0) sum += v.dot(part.matrix.block(first, first, count, count) * v);
  return sum;
}

LadderShares shares_of(const LadderBlock& block, const Eigen::VectorXd& w) {
  LadderShares out;
  const auto of = [&](const CovariancePart& part, LadderRowKind kind) {
    return variance(part, w, block.first(kind), block.count(kind));
  };
  for (const CovariancePart& part : block.uncertainty.parts) {
    if (!part.weighs) {  // Of the coefficients: common to both sides.
      out.coefficients += variance(part, w, 0, w.size());
      continue;
    }
    out.distances += of(part, LadderRowKind::host);
    out.calibrators += of(part, LadderRowKind::calibrator);
    out.hubble_flow += of(part, LadderRowKind::hubble_flow);
  }
  out.calibrators += out.distances;
  out.systematics = w.dot(block.uncertainty.systematic() * w);
  const double whole = out.calibrators + out.hubble_flow + out.coefficients + out.systematics;
  for (double* share : {&out.calibrators, &out.hubble_flow, &out.coefficients, &out.systematics, &out.distances})
    *share /= whole;
  return out;
}

}  // namespace

LadderSolution solve_ladder(const LadderBlock& block) {
  const LeastSquares least = solve_least_squares(block.design, block.y, inverse(block.uncertainty.weighting()));
  LadderSolution out;
  out.theta = least.theta;
  out.weights = least.weights;
  out.covariance = least.weights * block.uncertainty.total() * least.weights.transpose();
  out.covariance = (0.5 * (out.covariance + out.covariance.transpose())).eval();
  out.residuals = least.residuals;
  out.chi2 = least.chi2;
  out.dof = static_cast<int>(block.y.size() - out.theta.size());
  out.probability = chi_square_survival(out.chi2, out.dof);

  const Eigen::Index m = block.absolute_magnitude, h = block.five_log10_h0;
  out.m_b = out.theta(m);
  out.m_b_error = std::sqrt(out.covariance(m, m));
  out.five_log10_h0 = out.theta(h);
  out.five_log10_h0_error = std::sqrt(out.covariance(h, h));
  out.correlation = out.covariance(m, h) / (out.m_b_error * out.five_log10_h0_error);
  out.h0 = std::pow(10.0, 0.2 * out.five_log10_h0);
  out.h0_error = out.h0 * 0.2 * std::numbers::ln10 * out.five_log10_h0_error;
  out.shares = shares_of(block, out.weights.row(h).transpose());
  return out;
}

}  // namespace thirdrung
