#include "standardisation/shrink.h"

#include <Eigen/LU>
#include <cmath>

namespace thirdrung {

void shrink_magnitudes(std::span<const StandardisationDatum> data, const PopulationData& population,
                       const Eigen::VectorXd& parameters, std::span<StandardisedMagnitude> magnitudes) {
  using Layout = PopulationLayout;
  const double alpha = parameters[Layout::alpha];
  const double beta = parameters[Layout::beta];
  const double s2 = std::exp(2.0 * parameters[Layout::ln_s_width]);
  const double c2 = std::exp(2.0 * parameters[Layout::ln_c_width]);
  for (std::size_t i = 0; i < data.size(); ++i) {
    const StandardisationDatum& d = data[i];
    StandardisedMagnitude& m = magnitudes[i];
    const auto mean_place = static_cast<Eigen::Index>(Layout::first_mean + 2 * population.data[i].group);
    const double s_mean = parameters[mean_place];
    const double c_mean = parameters[mean_place + 1];
    Eigen::Matrix2d vxx = d.covariance.bottomRightCorner<2, 2>();
    vxx(0, 0) += s2;
    vxx(1, 1) += c2;
    const Eigen::Vector2d vxm(d.covariance(1, 0) - alpha * s2, d.covariance(2, 0) + beta * c2);
    const double vmm = d.covariance(0, 0) + alpha * alpha * s2 + beta * beta * c2 + m.intrinsic_variance;
    const Eigen::Vector2d slope = vxx.inverse() * vxm;
    const double mean_correction =
        -alpha * (s_mean - 1.0) + beta * c_mean - parameters[Layout::gamma] * (m.mass_probability - 0.5);
    m.shrunk_magnitude = d.m_b - mean_correction - slope.dot(Eigen::Vector2d(d.s - s_mean, d.c - c_mean));
    m.shrunk_variance = vmm - slope.dot(vxm);
  }
}

}  // namespace thirdrung
