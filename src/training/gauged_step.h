#pragma once

#include <Eigen/Cholesky>
#include <Eigen/Core>

#include "training/normal_equations.h"

namespace thirdrung {

/// Newton's steps to an optimum on the gauge surface (Lagrange multipliers; Nocedal & Wright 2006, Numerical
/// Optimization, sect. 18.1), with the Hessian of one template and the gauge where the template stands.
class GaugedStep {
 public:
  /// @param system assembled at `model`, gauge of error `gauge_error` included.
  GaugedStep(const SpectralTemplate& model, const NormalEquations& system, double gauge_error);

  struct Step {
    Eigen::VectorXd step;
    Eigen::VectorXd held;  ///< The part of the slope that the gauge holds.
  };
  /// @param slope −∂(objective without the gauge)/∂coefficients at `model`.
  Step from(const SpectralTemplate& model, const Eigen::VectorXd& slope) const;

 private:
  Eigen::LLT<Eigen::MatrixXd> factor_;
};

}  // namespace thirdrung
