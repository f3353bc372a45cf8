#include "hubbleflow/influence.h"

#include <cmath>
#include <numbers>

#include "hubbleflow/least_squares.h"

namespace thirdrung {

std::vector<InfluenceRow> influence(const ScanFrame& frame) {
  const std::vector<Eigen::Index> in = places_of(frame.baseline());
  const FlowSample used = cut(frame.sample(), frame.baseline());
  const Eigen::MatrixXd precision = 25.0 * precision_matrix(used.weighed_by(), used.supernovae);
  const Eigen::MatrixXd design = frame.design()(in, Eigen::all);
  const Eigen::VectorXd y = frame.single_intercepts()(in);
  const LeastSquares solution = solve_least_squares(design, y, precision);
  const Eigen::VectorXd qy = precision * solution.residuals;
  const Eigen::MatrixXd pa = precision * design;
  std::vector<InfluenceRow> rows;
  rows.reserve(in.size());
  for (Eigen::Index i = 0; i < y.size(); ++i) {
    const double q = precision(i, i) - pa.row(i).dot(solution.weights.col(i));
    const double weight = solution.weights(0, i);
    InfluenceRow row;
    row.supernova = used.supernovae[static_cast<std::size_t>(i)].name;
    row.weight = weight;
    row.delta_ab = -weight * qy[i] / q;
    row.delta_ab_error = std::abs(weight) / std::sqrt(q);
    row.predicted_pull = qy[i] / std::sqrt(q);
    rows.push_back(row);
  }
  return rows;
}

double chance_of_largest_pull(double pull, std::size_t count) {
  const double alone = std::erfc(std::abs(pull) / std::numbers::sqrt2);
  return -std::expm1(static_cast<double>(count) * std::log1p(-alone));
}

}  // namespace thirdrung
