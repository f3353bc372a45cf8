#include "hubbleflow/robust.h"

#include <fmt/format.h>

#include <Eigen/Cholesky>
#include <algorithm>
#include <cmath>
#include <numbers>

#include "hubbleflow/least_squares.h"

namespace thirdrung {

namespace {

/// Fills what all methods share from the final weights (full length).
void finish(RobustResult& result, const ScanFrame& frame, const Eigen::VectorXd& weights) {
  const Eigen::VectorXd difference = weights - frame.baseline_weights();
  result.a_b = frame.estimate(weights);
  result.error = frame.error_of(weights);
  result.delta_ab = frame.estimate(difference);
  result.delta_ab_error = frame.error_of(difference);
  std::stable_sort(result.mistrusted.begin(), result.mistrusted.end(),
                   [](const Mistrusted& a, const Mistrusted& b) { return std::abs(a.pull) > std::abs(b.pull); });
}

}  // namespace

RobustResult chauvenet(const ScanFrame& frame) {
  RobustResult result;
  result.method = "Chauvenet";
  std::vector<bool> members = frame.baseline();
  Eigen::VectorXd weights = frame.baseline_weights();
  for (;;) {
    ++result.rounds;
    result.supernovae = static_cast<std::size_t>(std::count(members.begin(), members.end(), true));
    const double a_b = frame.estimate(weights);
    std::vector<Eigen::Index> rejected;
    for (const Eigen::Index i : places_of(members)) {
      // A faint supernova has a low single intercept: its pull is positive, as its residual in magnitudes.
      const double pull = (a_b - frame.single_intercepts()[i]) / std::sqrt(frame.covariance()(i, i));
      if (static_cast<double>(result.supernovae) * std::erfc(std::abs(pull) / std::numbers::sqrt2) >= 0.5) continue;
      rejected.push_back(i);
      result.mistrusted.push_back({frame.sample().supernovae[static_cast<std::size_t>(i)].name, pull, 0.0});
    }
    if (rejected.empty() || result.supernovae - rejected.size() < frame.options().fewest) break;
    for (const Eigen::Index i : rejected) members[static_cast<std::size_t>(i)] = false;
    weights = frame.weights(members);
  }
  finish(result, frame, weights);
  return result;
}

Eigen::VectorXd own_variance(const ScanFrame& frame) {
  const Eigen::VectorXd conditional = frame.precision().diagonal().cwiseInverse();
  const Eigen::VectorXd scale = conditional.cwiseSqrt();
  // Largest eigenvalue of scale P scale by power iteration; a little is taken off since that comes from below.
  Eigen::VectorXd v = Eigen::VectorXd::Ones(frame.size());
  for (Eigen::Index i = 0; i < v.size(); ++i) v[i] += 0.01 * std::sin(static_cast<double>(i));
  double largest = 1.0;
  for (int round = 0; round < 200; ++round) {
    v = scale.cwiseProduct(frame.precision() * scale.cwiseProduct(v)).eval();
    const double norm = v.norm();
    v /= norm;
    const bool settled = std::abs(norm - largest) < 1e-6 * norm;
    largest = norm;
    if (settled) break;
  }
  return 25.0 * 0.98 / largest * conditional;
}

RobustResult student_t(const ScanFrame& frame, const Eigen::VectorXd& own_variance, const StudentOptions& options) {
  const std::vector<Eigen::Index> in = places_of(frame.baseline());
  const auto n = static_cast<Eigen::Index>(in.size());
  const Eigen::VectorXd own = 0.04 * own_variance(in);
  Eigen::MatrixXd common = frame.weighting()(in, in);
  common.diagonal() -= own;
  const bool independent = common.cwiseAbs().maxCoeff() < 1e-12 * own.maxCoeff();
  const Eigen::MatrixXd design = frame.design()(in, Eigen::all);
  const Eigen::VectorXd y = frame.single_intercepts()(in);
  const double nu = options.degrees_of_freedom;

  RobustResult result;
  result.method = fmt::format("Student-t, {:g} degrees of freedom", nu);
  result.supernovae = in.size();
  Eigen::VectorXd u = Eigen::VectorXd::Ones(n);
  Eigen::VectorXd weights;
  double a_b = frame.a_b();
  for (result.rounds = 1; result.rounds <= options.most_rounds; ++result.rounds) {
    const Eigen::VectorXd noise = own.cwiseQuotient(u);
    Eigen::VectorXd e;         // mean of e given the data
    Eigen::VectorXd variance;  // and its variance
    LeastSquares solution;
    if (independent) {
      solution = solve_least_squares(design, y, noise.cwiseInverse().asDiagonal());
      e = solution.residuals;
      variance = Eigen::VectorXd::Zero(n);
    } else {
      Eigen::MatrixXd total = common;
      total.diagonal() += noise;
      const Eigen::MatrixXd precision = Eigen::LLT<Eigen::MatrixXd>(total).solve(Eigen::MatrixXd::Identity(n, n));
      solution = solve_least_squares(design, y, precision);
      e = noise.cwiseProduct(precision * solution.residuals);
      variance = (noise.array() - noise.array().square() * precision.diagonal().array()).max(0.0).matrix();
    }
    weights = solution.weights.row(0).transpose();
    const Eigen::VectorXd square = (e.cwiseAbs2() + variance).cwiseQuotient(own);
    u = (nu + 1.0) / (nu + square.array());
    const double moved = std::abs(solution.theta[0] - a_b);
    a_b = solution.theta[0];
    // The first round has every u at 1: it repeats the baseline.
    if (result.rounds > 1 && moved < 1e-4 * frame.error()) break;
  }
  const double most = (nu + 1.0) / nu;
  for (Eigen::Index i = 0; i < n; ++i) {
    const double kept = u[i] / most;
    if (kept >= options.mistrust_below) continue;
    const Eigen::Index place = in[static_cast<std::size_t>(i)];
    const double pull = (a_b - y[i]) / std::sqrt(frame.covariance()(place, place));
    result.mistrusted.push_back({frame.sample().supernovae[static_cast<std::size_t>(place)].name, pull, kept});
  }
  Eigen::VectorXd full = Eigen::VectorXd::Zero(frame.size());
  full(in) = weights;
  finish(result, frame, full);
  return result;
}

ScanRow robust_row(const RobustResult& result) {
  std::string whom;
  for (std::size_t i = 0; i < result.mistrusted.size() && i < 8; ++i) {
    whom += fmt::format("{}{} ({:+.1f})", whom.empty() ? "" : ", ", result.mistrusted[i].supernova,
                        result.mistrusted[i].pull);
  }
  if (result.mistrusted.size() > 8) whom += fmt::format(" and {} more", result.mistrusted.size() - 8);
  return {"robust",
          result.method,
          {},
          result.supernovae,
          result.a_b,
          result.error,
          result.delta_ab,
          result.delta_ab_error,
          whom.empty() ? "mistrusts none" : "mistrusts " + whom};
}

std::vector<ScanRow> robust_rows(const ScanFrame& frame) {
  return {robust_row(chauvenet(frame)), robust_row(student_t(frame, own_variance(frame)))};
}

}  // namespace thirdrung
