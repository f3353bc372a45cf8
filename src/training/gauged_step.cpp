#include "training/gauged_step.h"

#include "training/penalties.h"

namespace thirdrung {

GaugedStep::GaugedStep(const SpectralTemplate& model, const NormalEquations& system, double gauge_error) {
  // The trainer's gauge is so stiff that nothing is left of the directions across it; a softer one keeps the Hessian
  // definite there, and the multipliers do the rest.
  constexpr double soft = 0.01;
  const GaugeConditions gauge = gauge_conditions(model);
  Eigen::MatrixXd hessian = system.hessian;
  hessian.selfadjointView<Eigen::Lower>().rankUpdate(gauge.gradient,
                                                     1 / (soft * soft) - 1 / (gauge_error * gauge_error));
  factor_.compute(hessian.selfadjointView<Eigen::Lower>());
}

GaugedStep::Step GaugedStep::from(const SpectralTemplate& model, const Eigen::VectorXd& slope) const {
  const GaugeConditions gauge = gauge_conditions(model);
  const Eigen::VectorXd free = factor_.solve(slope);
  const Eigen::MatrixXd across = factor_.solve(gauge.gradient);
  const Eigen::VectorXd multipliers = Eigen::MatrixXd(gauge.gradient.transpose() * across)
                                          .ldlt()
                                          .solve(gauge.gradient.transpose() * free + gauge.value);
  return {free - across * multipliers, gauge.gradient * multipliers};
}

}  // namespace thirdrung
