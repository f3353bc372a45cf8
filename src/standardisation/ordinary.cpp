#include "standardisation/ordinary.h"

#include <fmt/format.h>

#include <Eigen/Cholesky>
#include <algorithm>
#include <cmath>

#include "base/error.h"

namespace thirdrung {

namespace {

struct Solution {
  Eigen::Vector4d x;  ///< Intercept, alpha, beta, gamma.
  Eigen::Matrix4d covariance;
  double chi2;
};

/// m_b - modulus = intercept - alpha (s - 1) + beta c - gamma (P - 1/2), by weighted least squares.
Solution solve(const Eigen::MatrixX4d& design, const Eigen::VectorXd& y, const Eigen::VectorXd& variance) {
  const Eigen::VectorXd weight = variance.cwiseInverse();
  const Eigen::Matrix4d normal = design.transpose() * weight.asDiagonal() * design;
  const Eigen::LDLT<Eigen::Matrix4d> factor(normal);
  Solution s;
  s.covariance = factor.solve(Eigen::Matrix4d::Identity());
  s.x = factor.solve(design.transpose() * weight.cwiseProduct(y));
  s.chi2 = weight.dot((y - design * s.x).cwiseAbs2());
  return s;
}

/// Variance of each residual without the intrinsic scatter.
Eigen::VectorXd noise(std::span<const StandardisationDatum> data, const Eigen::Vector4d& x) {
  const Eigen::Vector3d a(1.0, x[1], -x[2]);
  Eigen::VectorXd v(static_cast<Eigen::Index>(data.size()));
  for (std::size_t i = 0; i < data.size(); ++i) {
    v[static_cast<Eigen::Index>(i)] = a.dot(data[i].covariance * a) + data[i].flow_variance;
  }
  return v;
}

}  // namespace

StandardisationResult fit_ordinary(std::span<const StandardisationDatum> data, const OrdinaryOptions& options) {
  if (data.size() < 10) {
    throw NoResultError(fmt::format("standardisation needs at least 10 supernovae; {} are left.", data.size()));
  }
  check_data(data);
  const auto n = static_cast<Eigen::Index>(data.size());
  Eigen::MatrixX4d design(n, 4);
  Eigen::VectorXd y(n);
  for (Eigen::Index i = 0; i < n; ++i) {
    const StandardisationDatum& d = data[static_cast<std::size_t>(i)];
    const double p = host_mass_probability(d.host_log_mass, d.host_log_mass_error, options.host_mass);
    design.row(i) << 1.0, -(d.s - 1.0), d.c, -(p - 0.5);
    y[i] = d.m_b - d.modulus;
  }
  const bool has_step = design.col(3).maxCoeff() - design.col(3).minCoeff() > 1e-3;
  // Without a step to fit, a tight prior keeps the system solvable: the column is replaced by a pseudo-observation of
  // gamma = 0.
  if (!has_step) design.col(3).setZero();
  const auto solve_with = [&](const Eigen::VectorXd& variance) {
    if (has_step) return solve(design, y, variance);
    Eigen::MatrixX4d longer(n + 1, 4);
    longer << design, Eigen::RowVector4d(0, 0, 0, 1);
    Eigen::VectorXd y_longer(n + 1);
    y_longer << y, 0.0;
    Eigen::VectorXd v_longer(n + 1);
    v_longer << variance, 1e-20;
    return solve(longer, y_longer, v_longer);
  };
  const double dof = static_cast<double>(n) - (has_step ? 4.0 : 3.0);

  double scatter2 = 0.01;
  Solution best = solve_with(Eigen::VectorXd::Constant(n, 0.02));
  for (int round = 0; round < options.most_rounds; ++round) {
    const Eigen::VectorXd fixed = noise(data, best.x);
    // chi2 falls as sigma_int grows: bisection for chi2 = dof.
    double low = 0.0;
    double high = 4.0;
    for (int i = 0; i < 60; ++i) {
      const double middle = 0.5 * (low + high);
      (solve_with((fixed.array() + middle).matrix()).chi2 > dof ? low : high) = middle;
    }
    const double moved = std::abs(0.5 * (low + high) - scatter2);
    scatter2 = 0.5 * (low + high);
    const Solution next = solve_with((fixed.array() + scatter2).matrix());
    const double step = (next.x - best.x).cwiseAbs().maxCoeff();
    best = next;
    if (step < 1e-12 && moved < 1e-12) break;
  }

  StandardisationResult result;
  result.supernovae = data.size();
  result.chi2 = best.chi2;
  result.covariance = Eigen::MatrixXd::Zero(5, 5);
  result.covariance.topLeftCorner<4, 4>() = best.covariance;
  const char* const names[] = {"intercept", "alpha", "beta", "gamma"};
  for (Eigen::Index k = 0; k < 4; ++k) {
    result.parameters.push_back({names[k], best.x[k], std::sqrt(best.covariance(k, k)), k == 3 && !has_step});
  }
  result.parameters.push_back({"sigma_int", std::sqrt(scatter2), 0.0, true});
  result.magnitudes = standardise(data, coefficients(result), options.host_mass);
  result.remarks.emplace_back(
      "Ordinary fit: alpha and beta are too small by about width^2 / (width^2 + error^2) of s and c; for comparison "
      "only.");
  return result;
}

}  // namespace thirdrung
