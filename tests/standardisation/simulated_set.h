#pragma once

#include <fmt/format.h>

#include <Eigen/Cholesky>
#include <cmath>
#include <cstdint>
#include <random>
#include <string>
#include <vector>

#include "standardisation/datum.h"
#include "standardisation/host_mass.h"

namespace thirdrung::testing {

/// The truth that simulated sets are drawn from.
struct Truth {
  double alpha = 1.3, beta = 3.0, gamma = 0.06, sigma_int = 0.10;
  double s_mean = 0.97, s_width = 0.09, c_mean = -0.01, c_width = 0.07;
  double intercept = -19.2;
  double s_error = 0.04, c_error = 0.04, m_error = 0.05;  ///< Means; every supernova's own is 0.5 to 1.5 times that.
};

/// A set drawn from the hierarchical model itself, host masses included (bimodal about the step, with errors).
inline std::vector<StandardisationDatum> simulated_set(std::size_t count, std::uint64_t seed, const Truth& t = {}) {
  std::mt19937_64 engine(seed);
  std::normal_distribution<double> normal;
  std::uniform_real_distribution<double> uniform(0.0, 1.0);
  std::vector<StandardisationDatum> data;
  for (std::size_t i = 0; i < count; ++i) {
    StandardisationDatum d;
    d.name = fmt::format("Z{}", i + 1);
    d.surveys.emplace_back(i % 2 == 0 ? "north" : "south");
    d.z_flow = 0.015 + 0.12 * uniform(engine);
    d.z_helio = d.z_flow;
    d.modulus = 5.0 * std::log10(d.z_flow) + 43.0;
    d.flow_variance = flow_variance(d.z_flow, 250.0, 0.0);
    const double true_mass = 10.0 + (uniform(engine) < 0.6 ? 0.6 : -0.6) + 0.3 * normal(engine);
    d.host_log_mass_error = 0.1;
    d.host_log_mass = true_mass + d.host_log_mass_error * normal(engine);
    const double s = t.s_mean + t.s_width * normal(engine);
    const double c = t.c_mean + t.c_width * normal(engine);
    const double step = true_mass > 10.0 ? 0.5 : -0.5;
    const double m = d.modulus + t.intercept - t.alpha * (s - 1.0) + t.beta * c - t.gamma * step +
                     std::sqrt(t.sigma_int * t.sigma_int + d.flow_variance) * normal(engine);
    const double scale = 0.5 + uniform(engine);
    const Eigen::Vector3d error = scale * Eigen::Vector3d(t.m_error, t.s_error, t.c_error);
    Eigen::Matrix3d correlation;
    correlation << 1.0, 0.2, 0.6, 0.2, 1.0, 0.1, 0.6, 0.1, 1.0;
    d.covariance = error.asDiagonal() * correlation * error.asDiagonal();
    const Eigen::Matrix3d lower = d.covariance.llt().matrixL();
    const Eigen::Vector3d noise = lower * Eigen::Vector3d(normal(engine), normal(engine), normal(engine));
    d.m_b = m + noise[0];
    d.s = s + noise[1];
    d.c = c + noise[2];
    data.push_back(d);
  }
  return data;
}

}  // namespace thirdrung::testing
