#pragma once

#include <Eigen/Cholesky>

#include "hubbleflow/covariance_model.h"
#include "simulated_flow.h"
#include "standardisation/deviates.h"

namespace thirdrung::testing {

/// A covariance model of every kind of part: own noise, a smooth correlated part, and `count` systematics of a few mmag
/// to 20 mmag.
inline CovarianceModel example_model(const FlowSample& sample, std::size_t count, std::uint64_t seed) {
  Deviates deviates(seed);
  CovarianceModel model;
  const auto n = static_cast<Eigen::Index>(sample.supernovae.size());
  for (const FlowSupernova& s : sample.supernovae) model.supernovae.push_back(s.name);
  model.parts.push_back({"fit", "statistical", sample.covariance.diagonal(), {}});
  CovariancePart field{"field", "statistical", {}, Eigen::MatrixXd(n, n)};
  for (Eigen::Index i = 0; i < n; ++i) {
    for (Eigen::Index j = 0; j < n; ++j) {
      const double dz =
          sample.supernovae[static_cast<std::size_t>(i)].z_flow - sample.supernovae[static_cast<std::size_t>(j)].z_flow;
      field.matrix(i, j) = 0.02 * 0.02 * std::exp(-dz * dz / (2.0 * 0.02 * 0.02));
    }
  }
  model.parts.push_back(field);
  for (std::size_t k = 0; k < count; ++k) {
    SystematicShift s{fmt::format("zero point {}", k + 1), k % 2 == 0 ? "zero point" : "Milky Way", 0.005, "mag",
                      Eigen::VectorXd(n)};
    const double size = 0.004 + 0.016 * deviates.uniform();
    for (Eigen::Index i = 0; i < n; ++i) {
      const bool touches = (static_cast<std::size_t>(i) + k) % 3 != 0;
      s.shift[i] = touches ? size * (1.0 + 3.0 * sample.supernovae[static_cast<std::size_t>(i)].z_flow) : 0.0;
    }
    model.systematics.push_back(std::move(s));
  }
  return model;
}

/// One draw of the noise that a covariance describes.
inline Eigen::VectorXd draw(const Eigen::MatrixXd& lower, Deviates& deviates) {
  Eigen::VectorXd x(lower.rows());
  for (Eigen::Index i = 0; i < x.size(); ++i) x[i] = deviates.normal();
  return lower * x;
}

}  // namespace thirdrung::testing
