#include "training/time_scale.h"

#include <utility>

#include "template/coefficients.h"
#include "template/interpolation.h"
#include "training/penalties.h"

namespace thirdrung {

namespace {

/// Values of a spline in wavelength at the centres of another basis.
Eigen::VectorXd at_centres(const CubicBasis& basis, const Eigen::VectorXd& coefficients,
                           const std::vector<double>& centres) {
  Eigen::VectorXd out(static_cast<Eigen::Index>(centres.size()));
  for (std::size_t j = 0; j < centres.size(); ++j) {
    const auto w = basis.at(centres[j]);
    out(static_cast<Eigen::Index>(j)) =
        Eigen::Map<const Eigen::Vector4d>(w.value.data()).dot(coefficients.segment<4>(w.first));
  }
  return out;
}

using RowMajor = Eigen::Matrix<double, Eigen::Dynamic, Eigen::Dynamic, Eigen::RowMajor>;

Eigen::VectorXd as_vector(const Eigen::MatrixXd& coefficients) {
  const RowMajor rows = coefficients;
  return Eigen::Map<const Eigen::VectorXd>(rows.data(), rows.size());
}

}  // namespace

TimeScale time_scale(const SpectralTemplate& model) {
  const CoefficientLayout layout(model);
  // Γ − q Φ_q on the grid of Φ and on that of Γ, and Γ − q Γ_q on that of Γ.
  const auto surface = [&](const CubicBasis& phase, const CubicBasis& wavelength, bool slope_of_phi) {
    const auto phases = phase.centres();
    const auto waves = wavelength.centres();
    Eigen::MatrixXd value(phase.size(), wavelength.size());
    for (int i = 0; i < phase.size(); ++i) {
      const double q = phases[static_cast<std::size_t>(i)];
      const Eigen::VectorXd slope = slope_of_phi
                                        ? at_centres(model.wavelength_basis, model.phi_slice(q, true), waves)
                                        : at_centres(model.stretch_wavelength_basis, model.gamma_slice(q, true), waves);
      value.row(i) = at_centres(model.stretch_wavelength_basis, model.gamma_slice(q), waves) - q * slope;
    }
    return as_vector(interpolate(phase, wavelength, value));
  };
  Eigen::VectorXd scale = Eigen::VectorXd::Zero(layout.size());
  Eigen::VectorXd unit = Eigen::VectorXd::Zero(layout.size());
  const int gammas = layout.colour_start() - layout.gamma_start();
  scale.head(layout.gamma_start()) = surface(model.phase_basis, model.wavelength_basis, true);
  scale.segment(layout.gamma_start(), gammas) =
      surface(model.stretch_phase_basis, model.stretch_wavelength_basis, false);
  unit.segment(layout.gamma_start(), gammas) = surface(model.stretch_phase_basis, model.stretch_wavelength_basis, true);

  const GaugeConditions gauge = gauge_conditions(model);
  const Eigen::VectorXd of_scale = gauge.gradient.transpose() * scale;
  const Eigen::VectorXd of_unit = gauge.gradient.transpose() * unit;
  const double b = -of_scale.dot(of_unit) / of_unit.squaredNorm();
  return {scale + b * unit, 1 + b};
}

double time_scale_cost(double variance_of_s, const UnknownsPrior& prior) {
  return 1 - variance_of_s / (prior.s_width * prior.s_width);
}

HeldTimeScale::HeldTimeScale(TimeScale scale, const Eigen::VectorXd& curvature)
    : scale_(std::move(scale)), pull_(curvature / scale_.direction.dot(curvature)) {}

void HeldTimeScale::correct_spread(double cost, Eigen::VectorXd& slope) const {
  slope += scale_.growth * cost * pull_ - part_along(slope);
}

}  // namespace thirdrung
