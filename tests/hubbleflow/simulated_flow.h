#pragma once

#include <fmt/format.h>

#include <cmath>
#include <cstdint>
#include <random>

#include "hubbleflow/flow_sample.h"

namespace thirdrung::testing {

/// Supernovae over the whole sky at 0.01 < z < 0.15 on the relation with intercept `a_b`, without noise; diagonal
/// covariance of 0.12 mag and 250 km/s.
inline FlowSample exact_flow(std::size_t count, double a_b, std::uint64_t seed, const FlowOptions& options = {}) {
  std::mt19937_64 engine(seed);
  std::uniform_real_distribution<double> uniform(0.0, 1.0);
  FlowSample sample;
  const auto n = static_cast<Eigen::Index>(count);
  sample.covariance = Eigen::MatrixXd::Zero(n, n);
  for (Eigen::Index i = 0; i < n; ++i) {
    FlowSupernova s;
    s.name = fmt::format("Q{}", i + 1);
    s.surveys.emplace_back(i % 3 == 0 ? "east" : i % 3 == 1 ? "west" : "high");
    s.ra = 360.0 * uniform(engine);
    s.dec = std::asin(2.0 * uniform(engine) - 1.0) * 180.0 / 3.14159265358979323846;
    s.z_flow = std::cbrt(1e-6 + (0.15 * 0.15 * 0.15 - 1e-6) * uniform(engine));
    s.z_flow = 0.4 * s.z_flow + 0.6 * (0.01 + 0.139 * uniform(engine));
    s.z_helio = s.z_flow + 0.001 * (uniform(engine) - 0.5);
    s.c = 0.1 * (uniform(engine) - 0.5);
    s.s = 1.0 + 0.1 * (uniform(engine) - 0.5);
    s.host_log_mass = 9.0 + 2.0 * uniform(engine);
    s.peak_mjd = 55000.0 + 3000.0 * uniform(engine);
    s.m_b_standardised = 0.0;
    s.m_b_standardised = 5.0 * (single_intercepts(std::span(&s, 1), options)[0] - a_b);
    const double velocity = 5.0 / std::log(10.0) * 250.0 / (299792.458 * s.z_flow);
    sample.covariance(i, i) = 0.12 * 0.12 + velocity * velocity;
    sample.supernovae.push_back(s);
  }
  return sample;
}

}  // namespace thirdrung::testing
