#pragma once

#include <Eigen/Core>
#include <array>
#include <span>
#include <vector>

namespace thirdrung {

/// One supernova as the population likelihood sees it.
struct PopulationDatum {
  Eigen::Vector3d x = Eigen::Vector3d::Zero();           ///< Observed (m_b - modulus, s, c).
  Eigen::Matrix3d covariance = Eigen::Matrix3d::Zero();  ///< Of x; the variance of the modulus is in its first element.
  double mass_probability = 0.5;                         ///< P(host above the step).
  std::size_t group = 0;                                 ///< Which population's means it belongs to.
};

/// The parameters common to all groups; the two means of group g follow at first_mean + 2 g (s) and + 1 (c).
///
/// Widths and scatter are carried as natural logarithms, so that they stay positive and their likelihood is near
/// Gaussian.
struct PopulationLayout {
  static constexpr std::size_t intercept = 0, alpha = 1, beta = 2, gamma = 3, ln_sigma = 4, ln_s_width = 5,
                               ln_c_width = 6;
  static constexpr std::size_t first_mean = 7;
  static constexpr std::array<std::size_t, 3> widths = {ln_sigma, ln_s_width, ln_c_width};  ///< Kept as logarithms.
  std::size_t groups = 1;
  std::size_t size() const { return first_mean + 2 * groups; }
};

/// True for the parameters that are logarithms.
constexpr bool is_width(std::size_t place) {
  return place >= PopulationLayout::ln_sigma && place <= PopulationLayout::ln_c_width;
}

/// Minus twice the logarithm of the marginal likelihood, with its first and second derivatives.
struct PopulationLikelihood {
  double value = 0.0;        ///< Sum of ln det(2 pi V) + r^T V^-1 r.
  double chi2 = 0.0;         ///< Sum of r^T V^-1 r alone.
  Eigen::VectorXd gradient;  ///< Empty unless asked for.
  Eigen::MatrixXd hessian;   ///< Empty unless asked for.
  Eigen::MatrixXd fisher;    ///< Expected Hessian, positive semi-definite; empty unless asked for.
};

enum class Derivatives { none, first, second };

/// The linear-normal hierarchical model (March et al. 2011, MNRAS 418, 2308), true values integrated out.
///
/// True s ~ N(s_mean, s_width^2), true c ~ N(c_mean, c_width^2), and the true magnitude
/// m = modulus + intercept - alpha (s - 1) + beta c - gamma (P - 1/2) + N(0, sigma_int^2 + gamma^2 P (1 - P)).
/// Observed (m, s, c) scatter about the truth with the light-curve covariance. All of it being linear and normal, the
/// observed triple is normal with mean and covariance
///   mean = (intercept - alpha (s_mean - 1) + beta c_mean - gamma (P - 1/2), s_mean, c_mean)
///   V = covariance + S^2 u u^T + C^2 w w^T + (sigma_int^2 + gamma^2 P (1 - P)) e e^T,
///   u = (-alpha, 1, 0), w = (beta, 0, 1), e = (1, 0, 0), S and C the widths.
/// P (1 - P) is the variance of a host that is above the step with probability P: the two-way mixture to second order.
/// @param parameters laid out as PopulationLayout says.
PopulationLikelihood population_likelihood(std::span<const PopulationDatum> data, const PopulationLayout& layout,
                                           const Eigen::VectorXd& parameters, Derivatives derivatives);

}  // namespace thirdrung
