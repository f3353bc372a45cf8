#include "hubbleflow/velocity_covariance.h"

#include <fmt/format.h>

#include <Eigen/Geometry>
#include <algorithm>
#include <array>
#include <cmath>

#include "base/constants.h"
#include "base/error.h"
#include "base/parallel.h"
#include "sky/position.h"

namespace thirdrung {

namespace {

/// j0(x) - 2 j1(x)/x and j1(x)/x.
std::array<double, 2> kernels(double x) {
  if (x < 0.05) {
    const double x2 = x * x;
    return {1.0 / 3.0 - x2 / 10.0 + x2 * x2 / 168.0, 1.0 / 3.0 - x2 / 30.0 + x2 * x2 / 840.0};
  }
  const double j0 = std::sin(x) / x;
  const double j1_over_x = (j0 - std::cos(x)) / (x * x);
  return {j0 - 2.0 * j1_over_x, j1_over_x};
}

/// Their derivatives with respect to x.
std::array<double, 2> kernel_slopes(double x) {
  if (x < 0.05) return {-x / 5.0 + x * x * x / 42.0, -x / 15.0 + x * x * x / 210.0};
  const double j0 = std::sin(x) / x;
  const double j1_over_x = (j0 - std::cos(x)) / (x * x);
  const double j1 = j1_over_x * x;
  // (j1/x)' = -j2/x, j2 = 3 j1/x - j0; j0' = -j1.
  const double across = -(3.0 * j1_over_x - j0) / x;
  return {-j1 - 2.0 * across, across};
}

struct Node {
  double k, weight;  ///< Weight: dk P(k) W^2 (100 f)^2 / (2 pi^2).
};

/// Gauss-Legendre panels, narrow enough that j(kr) turns by at most about half a period in one.
std::vector<Node> nodes(const VelocityCovarianceOptions& options, double largest_separation) {
  constexpr std::array<double, 3> x = {0.2386191860831969, 0.6612093864662645, 0.9324695142031521};
  constexpr std::array<double, 3> w = {0.4679139345726910, 0.3607615730481386, 0.1713244923791704};
  const PowerSpectrum power(options.matter);
  const double rate = 100.0 * growth_rate(0.0, options.matter);
  const double scale = options.amplitude * options.amplitude * rate * rate / (2.0 * constants::pi * constants::pi);
  const double smoothing = std::max(options.smoothing, 0.0);
  // Where smoothing, or the spectrum itself, has made the rest negligible.
  const double k_max = smoothing > 0.3 ? 5.0 / smoothing : 15.0;
  const double widest = constants::pi / largest_separation;
  std::vector<Node> result;
  double low = 0.0;
  double width = 1e-5;
  while (low < k_max) {
    const double half = 0.5 * width;
    const double middle = low + half;
    for (std::size_t i = 0; i < x.size(); ++i) {
      for (const double sign : {-1.0, 1.0}) {
        const double k = middle + sign * half * x[i];
        const double window = std::exp(-k * k * smoothing * smoothing);
        result.push_back({k, scale * half * w[i] * power(k) * window});
      }
    }
    low += width;
    width = std::min(width * 1.2, widest);
  }
  return result;
}

}  // namespace

VelocityCorrelation::VelocityCorrelation(const VelocityCovarianceOptions& options, double largest_separation)
    : step_(1.0) {
  const std::vector<Node> grid = nodes(options, std::max(largest_separation, 300.0));
  const auto count = static_cast<std::size_t>(std::ceil(largest_separation / step_)) + 2;
  along_.resize(count);
  across_.resize(count);
  along_slope_.resize(count);
  across_slope_.resize(count);
  parallel_for(count, options.threads, [&](std::size_t i) {
    const double r = static_cast<double>(i) * step_;
    for (const Node& node : grid) {
      const auto value = kernels(node.k * r);
      const auto slope = kernel_slopes(node.k * r);
      along_[i] += node.weight * value[0];
      across_[i] += node.weight * value[1];
      along_slope_[i] += node.weight * node.k * slope[0];
      across_slope_[i] += node.weight * node.k * slope[1];
    }
  });
}

double VelocityCorrelation::interpolate(const std::vector<double>& value, const std::vector<double>& slope,
                                        double r) const {
  const double place = r / step_;
  const std::size_t i = std::min(static_cast<std::size_t>(place), value.size() - 2);
  const double t = std::min(place - static_cast<double>(i), 1.0);
  const double u = 1.0 - t;
  return u * u * ((1.0 + 2.0 * t) * value[i] + t * step_ * slope[i]) +
         t * t * ((1.0 + 2.0 * u) * value[i + 1] - u * step_ * slope[i + 1]);
}

double VelocityCorrelation::along(double r) const {
  return interpolate(along_, along_slope_, r);
}
double VelocityCorrelation::across(double r) const {
  return interpolate(across_, across_slope_, r);
}

Eigen::MatrixXd radial_velocity_covariance(std::span<const FlowSupernova> supernovae,
                                           const VelocityCovarianceOptions& options) {
  const std::size_t n = supernovae.size();
  std::vector<Eigen::Vector3d> direction(n);
  std::vector<double> distance(n);
  std::vector<double> growth(n);
  const Expansion lcdm = Expansion::flat_lcdm(options.matter.omega_m);
  const double rate_today = growth_rate(0.0, options.matter);
  double farthest = 1.0;
  for (std::size_t i = 0; i < n; ++i) {
    const FlowSupernova& s = supernovae[i];
    if (!is_direction(s.ra, s.dec)) {
      throw InputError({fmt::format("supernova {}", s.name), std::nullopt, ""}, "it has no position",
                       "the velocity covariance needs ra and dec of all");
    }
    const UnitVector u = unit_vector(s.ra, s.dec);
    direction[i] = Eigen::Vector3d(u[0], u[1], u[2]);
    distance[i] = comoving_distance_mpc_h(s.z_flow, lcdm);
    growth[i] = growth_factor(s.z_flow, options.matter) * growth_rate(s.z_flow, options.matter) / rate_today *
                hubble_ratio(s.z_flow, options.matter) / (1.0 + s.z_flow);
    farthest = std::max(farthest, distance[i]);
  }
  const VelocityCorrelation correlation(options, 2.0 * farthest);
  Eigen::MatrixXd result(static_cast<Eigen::Index>(n), static_cast<Eigen::Index>(n));
  parallel_for(n, options.threads, [&](std::size_t i) {
    const auto ii = static_cast<Eigen::Index>(i);
    result(ii, ii) = growth[i] * growth[i] * correlation.variance();
    for (std::size_t j = 0; j < i; ++j) {
      const Eigen::Vector3d apart = distance[i] * direction[i] - distance[j] * direction[j];
      const double r = apart.norm();
      const double cos_between = direction[i].dot(direction[j]);
      // Without a separation both functions are the same and any direction will do.
      const double cos_i = r > 1e-9 ? apart.dot(direction[i]) / r : 1.0;
      const double cos_j = r > 1e-9 ? apart.dot(direction[j]) / r : cos_between;
      const double across = correlation.across(r);
      // sin a_i sin a_j with its sign is the part of n_i . n_j that is across the separation.
      const double value = cos_i * cos_j * correlation.along(r) + (cos_between - cos_i * cos_j) * across;
      const auto jj = static_cast<Eigen::Index>(j);
      result(ii, jj) = growth[i] * growth[j] * value;
    }
  });
  result.triangularView<Eigen::StrictlyUpper>() = result.transpose();
  return result;
}

Eigen::MatrixXd velocity_covariance(std::span<const FlowSupernova> supernovae, const Expansion& expansion,
                                    const VelocityCovarianceOptions& options) {
  Eigen::VectorXd response(static_cast<Eigen::Index>(supernovae.size()));
  for (std::size_t i = 0; i < supernovae.size(); ++i) {
    response[static_cast<Eigen::Index>(i)] =
        5.0 * velocity_response(supernovae[i].z_flow, expansion) / constants::speed_of_light_km_s;
  }
  // The product of two responses first: the same number on both sides of the diagonal.
  return radial_velocity_covariance(supernovae, options).cwiseProduct(response * response.transpose());
}

}  // namespace thirdrung
