#include "hubbleflow/intercept.h"

#include <fmt/format.h>

#include <Eigen/Geometry>
#include <Eigen/LU>
#include <algorithm>
#include <cmath>

#include "base/chi_square.h"
#include "base/constants.h"
#include "base/error.h"
#include "hubbleflow/least_squares.h"
#include "sky/position.h"

namespace thirdrung {

namespace {

Expansion with_q0(Expansion e, double q0) {
  e.q0 = q0;
  e.omega_m = (q0 + 1.0) / 1.5;
  return e;
}

double q0_of(const Expansion& e) {
  return e.form == Expansion::Form::flat_lcdm ? 1.5 * e.omega_m - 1.0 : e.q0;
}

double q0_slope(double z, const Expansion& e) {
  constexpr double h = 1e-4;
  const double q0 = q0_of(e);
  return (log_expansion_term(z, with_q0(e, q0 + h)) - log_expansion_term(z, with_q0(e, q0 - h))) / (2.0 * h);
}

FlowDipole dipole_of(const Eigen::Vector3d& velocity, const Eigen::Matrix3d& covariance) {
  FlowDipole d;
  d.velocity = velocity;
  d.covariance = covariance;
  d.amplitude = velocity.norm();
  const Eigen::Vector3d along = velocity / d.amplitude;
  const double dec = std::asin(std::clamp(along[2], -1.0, 1.0)) / constants::degree;
  const double ra = std::atan2(along[1], along[0]) / constants::degree;
  const Galactic g = galactic_from_icrs(ra < 0.0 ? ra + 360.0 : ra, dec);
  d.l = g.l;
  d.b = g.b;
  d.amplitude_error = std::sqrt(along.dot(covariance * along));
  // Unit vectors of growing b and l, in ICRS components, from the Galactic pole's direction.
  const Equatorial pole = icrs_from_galactic(0.0, 90.0);
  const UnitVector p = unit_vector(pole.ra, pole.dec);
  const Eigen::Vector3d north(p[0], p[1], p[2]);
  const Eigen::Vector3d east = north.cross(along).normalized();
  const Eigen::Vector3d up = along.cross(east);
  d.b_error = std::sqrt(up.dot(covariance * up)) / d.amplitude / constants::degree;
  d.l_error =
      std::sqrt(east.dot(covariance * east)) / d.amplitude / constants::degree / std::cos(g.b * constants::degree);
  d.chi2 = velocity.dot(covariance.inverse() * velocity);
  d.probability = chi_square_survival(d.chi2, 3);
  return d;
}

}  // namespace

Eigen::MatrixXd intercept_design(std::span<const FlowSupernova> supernovae, const InterceptOptions& options) {
  const auto n = static_cast<Eigen::Index>(supernovae.size());
  const Eigen::Index columns = 1 + (options.fit_q0 ? 1 : 0) + (options.fit_dipole ? 3 : 0);
  Eigen::MatrixXd design = Eigen::MatrixXd::Ones(n, columns);
  for (Eigen::Index i = 0; i < n; ++i) {
    const FlowSupernova& s = supernovae[static_cast<std::size_t>(i)];
    if (options.fit_q0) design(i, 1) = -q0_slope(s.z_flow, options.flow.expansion);
    if (!options.fit_dipole) continue;
    if (!is_direction(s.ra, s.dec)) {
      throw InputError({fmt::format("supernova {}", s.name), std::nullopt, ""}, "it has no position",
                       "a dipole needs ra and dec of all");
    }
    const UnitVector u = unit_vector(s.ra, s.dec);
    const double response = velocity_response(s.z_flow, options.flow.expansion) / constants::speed_of_light_km_s;
    for (std::size_t k = 0; k < 3; ++k) design(i, columns - 3 + static_cast<Eigen::Index>(k)) = response * u[k];
  }
  return design;
}

InterceptResult fit_intercept(const FlowSample& sample, const InterceptOptions& options) {
  check_flow_sample(sample);
  InterceptResult result;
  result.used = in_redshift_range(sample.supernovae, options.z_min, options.z_max);
  const FlowSample used = cut(sample, result.used);
  result.supernovae = used.supernovae.size();
  if (result.supernovae < options.fewest) {
    throw NoResultError(
        fmt::format("only {} supernovae have {} < z_flow < {}, and an intercept needs {}; widen the redshift range.",
                    result.supernovae, options.z_min, options.z_max, options.fewest));
  }
  const Eigen::MatrixXd precision = 25.0 * precision_matrix(used.weighed_by(), used.supernovae);
  InterceptOptions current = options;
  LeastSquares solution;
  for (int round = 0; round < 20; ++round) {
    result.single = single_intercepts(used.supernovae, current.flow);
    solution = solve_least_squares(intercept_design(used.supernovae, current), result.single, precision);
    if (!options.fit_q0) break;
    current.flow.expansion = with_q0(current.flow.expansion, q0_of(current.flow.expansion) + solution.theta[1]);
    if (std::abs(solution.theta[1]) < 1e-9) break;
  }
  if (used.weighting.size() > 0) {
    solution.covariance = 0.04 * solution.weights * used.covariance * solution.weights.transpose();
  }
  result.a_b = solution.theta[0];
  result.error = std::sqrt(solution.covariance(0, 0));
  result.chi2 = solution.chi2;
  result.dof = static_cast<int>(result.supernovae) - static_cast<int>(solution.theta.size());
  result.probability = chi_square_survival(result.chi2, result.dof);
  result.weights = solution.weights.row(0).transpose();
  result.residuals = -5.0 * solution.residuals;
  result.residual_errors = used.covariance.diagonal().cwiseSqrt();
  result.scatter_mag = std::sqrt(result.residuals.squaredNorm() / static_cast<double>(result.supernovae));
  if (options.fit_q0) {
    result.q0 = q0_of(current.flow.expansion);
    result.q0_error = std::sqrt(solution.covariance(1, 1));
    result.q0_correlation = solution.covariance(0, 1) / (result.error * *result.q0_error);
  }
  if (options.fit_dipole) {
    result.dipole = dipole_of(solution.theta.tail<3>(), solution.covariance.bottomRightCorner<3, 3>());
  }
  return result;
}

}  // namespace thirdrung
