#include "standardisation/population_likelihood.h"

#include <Eigen/Cholesky>
#include <Eigen/LU>
#include <cmath>
#include <numbers>

namespace thirdrung {

namespace {

using Layout = PopulationLayout;
constexpr std::size_t local_size = Layout::first_mean + 2;
constexpr std::size_t s_mean = Layout::first_mean;
constexpr std::size_t c_mean = Layout::first_mean + 1;
/// Parameters that change V, in the order of the arrays below.
constexpr std::array<std::size_t, 6> in_covariance = {Layout::alpha,    Layout::beta,       Layout::gamma,
                                                      Layout::ln_sigma, Layout::ln_s_width, Layout::ln_c_width};

/// The parameters of one supernova's population, widths squared.
struct Local {
  double intercept, alpha, beta, gamma, scatter2, s2, c2, s_mean, c_mean;
};

Local local_parameters(const Eigen::VectorXd& p, std::size_t group) {
  const auto at = [&p](std::size_t i) { return p[static_cast<Eigen::Index>(i)]; };
  const std::size_t mean = Layout::first_mean + 2 * group;
  return {at(0),    at(1),       at(2), at(3), std::exp(2.0 * at(4)), std::exp(2.0 * at(5)), std::exp(2.0 * at(6)),
          at(mean), at(mean + 1)};
}

Eigen::Matrix3d symmetric(double mm, double ms, double mc, double ss, double cc) {
  Eigen::Matrix3d m;
  m << mm, ms, mc, ms, ss, 0.0, mc, 0.0, cc;
  return m;
}

/// V, its first derivatives, and its non-zero second derivatives (row and column as places of in_covariance).
struct CovarianceModel {
  Eigen::Matrix3d value;
  std::array<Eigen::Matrix3d, 6> first;

  Eigen::Matrix3d second(std::size_t a, std::size_t b, const Local& q, double mass_variance) const {
    if (a > b) std::swap(a, b);
    if (a == b) {
      if (a == 0) return symmetric(2.0 * q.s2, 0, 0, 0, 0);
      if (a == 1) return symmetric(2.0 * q.c2, 0, 0, 0, 0);
      if (a == 2) return symmetric(2.0 * mass_variance, 0, 0, 0, 0);
      return 2.0 * first[a];
    }
    if (a == 0 && b == 4) return 2.0 * first[0];
    if (a == 1 && b == 5) return 2.0 * first[1];
    return Eigen::Matrix3d::Zero();
  }
};

CovarianceModel covariance_model(const PopulationDatum& d, const Local& q) {
  const double mass_variance = d.mass_probability * (1.0 - d.mass_probability);
  CovarianceModel v;
  v.value = d.covariance + symmetric(q.alpha * q.alpha * q.s2 + q.beta * q.beta * q.c2 + q.scatter2 +
                                         q.gamma * q.gamma * mass_variance,
                                     -q.alpha * q.s2, q.beta * q.c2, q.s2, q.c2);
  v.first[0] = symmetric(2.0 * q.alpha * q.s2, -q.s2, 0, 0, 0);
  v.first[1] = symmetric(2.0 * q.beta * q.c2, 0, q.c2, 0, 0);
  v.first[2] = symmetric(2.0 * q.gamma * mass_variance, 0, 0, 0, 0);
  v.first[3] = symmetric(2.0 * q.scatter2, 0, 0, 0, 0);
  v.first[4] = 2.0 * q.s2 * symmetric(q.alpha * q.alpha, -q.alpha, 0, 1, 0);
  v.first[5] = 2.0 * q.c2 * symmetric(q.beta * q.beta, 0, q.beta, 0, 1);
  return v;
}

using LocalVector = Eigen::Matrix<double, local_size, 1>;
using LocalMatrix = Eigen::Matrix<double, local_size, local_size>;

/// The terms of one supernova.
struct Terms {
  double log_determinant = 0.0, chi2 = 0.0;
  LocalVector gradient = LocalVector::Zero();
  LocalMatrix hessian = LocalMatrix::Zero();
  LocalMatrix fisher = LocalMatrix::Zero();
};

Terms terms_of(const PopulationDatum& d, const Local& q, Derivatives derivatives) {
  const CovarianceModel v = covariance_model(d, q);
  const double half_step = d.mass_probability - 0.5;
  const Eigen::Vector3d r(d.x[0] - q.intercept + q.alpha * (q.s_mean - 1.0) - q.beta * q.c_mean + q.gamma * half_step,
                          d.x[1] - q.s_mean, d.x[2] - q.c_mean);
  const Eigen::LLT<Eigen::Matrix3d> cholesky(v.value);
  const Eigen::Matrix3d w = cholesky.solve(Eigen::Matrix3d::Identity());
  const Eigen::Vector3d u = w * r;
  Terms t;
  const Eigen::Matrix3d lower = cholesky.matrixL();
  t.log_determinant = 2.0 * std::log(lower(0, 0) * lower(1, 1) * lower(2, 2));
  t.chi2 = r.dot(u);
  if (derivatives == Derivatives::none) return t;

  // Derivatives of r, one column a parameter.
  Eigen::Matrix<double, 3, local_size> dr = Eigen::Matrix<double, 3, local_size>::Zero();
  dr(0, Layout::intercept) = -1.0;
  dr(0, Layout::alpha) = q.s_mean - 1.0;
  dr(0, Layout::beta) = -q.c_mean;
  dr(0, Layout::gamma) = half_step;
  dr.col(s_mean) << q.alpha, -1.0, 0.0;
  dr.col(c_mean) << -q.beta, 0.0, -1.0;
  std::array<Eigen::Matrix3d, 6> wv;  // V^-1 dV
  for (std::size_t k = 0; k < 6; ++k) wv[k] = w * v.first[k];

  t.gradient = 2.0 * dr.transpose() * u;
  for (std::size_t k = 0; k < 6; ++k) {
    t.gradient[static_cast<Eigen::Index>(in_covariance[k])] += wv[k].trace() - u.dot(v.first[k] * u);
  }
  if (derivatives == Derivatives::first) return t;

  const LocalMatrix curvature = 2.0 * dr.transpose() * w * dr;
  t.hessian = curvature;
  t.fisher = curvature;
  t.hessian(Layout::alpha, s_mean) += 2.0 * u[0];
  t.hessian(s_mean, Layout::alpha) += 2.0 * u[0];
  t.hessian(Layout::beta, c_mean) -= 2.0 * u[0];
  t.hessian(c_mean, Layout::beta) -= 2.0 * u[0];
  const double mass_variance = d.mass_probability * (1.0 - d.mass_probability);
  for (std::size_t a = 0; a < 6; ++a) {
    const auto ia = static_cast<Eigen::Index>(in_covariance[a]);
    const LocalVector cross = 2.0 * dr.transpose() * (wv[a] * u);
    t.hessian.col(ia) -= cross;
    t.hessian.row(ia) -= cross.transpose();
    for (std::size_t b = 0; b < 6; ++b) {
      const auto ib = static_cast<Eigen::Index>(in_covariance[b]);
      const Eigen::Matrix3d vab = v.second(a, b, q, mass_variance);
      const double pair = (wv[a] * wv[b]).trace();
      t.hessian(ia, ib) += (w * vab).trace() - pair - u.dot(vab * u) + 2.0 * u.dot(v.first[a] * (wv[b] * u));
      t.fisher(ia, ib) += pair;
    }
  }
  return t;
}

}  // namespace

PopulationLikelihood population_likelihood(std::span<const PopulationDatum> data, const PopulationLayout& layout,
                                           const Eigen::VectorXd& parameters, Derivatives derivatives) {
  PopulationLikelihood sum;
  const auto n = static_cast<Eigen::Index>(layout.size());
  if (derivatives != Derivatives::none) sum.gradient = Eigen::VectorXd::Zero(n);
  if (derivatives == Derivatives::second) {
    sum.hessian = Eigen::MatrixXd::Zero(n, n);
    sum.fisher = Eigen::MatrixXd::Zero(n, n);
  }
  double log_determinants = 0.0;
  for (const PopulationDatum& d : data) {
    const Terms t = terms_of(d, local_parameters(parameters, d.group), derivatives);
    log_determinants += t.log_determinant;
    sum.chi2 += t.chi2;
    if (derivatives == Derivatives::none) continue;
    std::array<Eigen::Index, local_size> global{};
    for (std::size_t i = 0; i < local_size; ++i) {
      global[i] = static_cast<Eigen::Index>(i < Layout::first_mean ? i : i + 2 * d.group);
    }
    for (std::size_t i = 0; i < local_size; ++i) {
      const auto li = static_cast<Eigen::Index>(i);
      sum.gradient[global[i]] += t.gradient[li];
      if (derivatives == Derivatives::first) continue;
      for (std::size_t j = 0; j < local_size; ++j) {
        const auto lj = static_cast<Eigen::Index>(j);
        sum.hessian(global[i], global[j]) += t.hessian(li, lj);
        sum.fisher(global[i], global[j]) += t.fisher(li, lj);
      }
    }
  }
  sum.value = log_determinants + sum.chi2 + 3.0 * static_cast<double>(data.size()) * std::log(2.0 * std::numbers::pi);
  return sum;
}

}  // namespace thirdrung
