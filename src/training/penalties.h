#pragma once

#include "template/coefficients.h"
#include "training/normal_equations.h"

namespace thirdrung {

/// Strength of the smoothing, each the inverse variance of a Gaussian prior on second differences of neighbouring
/// coefficients (knot spacing divided out, so that closer knots allow sharper curvature). Chosen by cross-validation.
struct Smoothness {
  double phi_phase = 20;
  double phi_wavelength = 20;
  double gamma_phase = 4;
  double gamma_wavelength = 4;
  double gamma_size = 0.05;  ///< Inverse variance of Γ about zero; decides only where no data do.
  double colour = 100;
};

/// Adds the smoothing to a system, and returns ½ × penalty at the current coefficients.
double add_smoothness(const SpectralTemplate& model, const Smoothness& smoothness, NormalEquations& into);
/// ½ × penalty alone.
double half_smoothness(const SpectralTemplate& model, const Smoothness& smoothness);

/// The gauge conditions, six of the template and a seventh that makes B peak at p = 0 whatever s.
struct GaugeConditions {
  Eigen::VectorXd value;     ///< What each leaves; zero in the gauge.
  Eigen::MatrixXd gradient;  ///< Coefficients × conditions.
};
GaugeConditions gauge_conditions(const SpectralTemplate& model);

/// Adds the gauge conditions as
/// pseudo-observations of error `error`; returns ½ × their χ².
double add_gauge(const SpectralTemplate& model, double error, NormalEquations& into);
double half_gauge(const SpectralTemplate& model, double error);

}  // namespace thirdrung
