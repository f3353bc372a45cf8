#include "pipeline/weight_shift.h"

#include "pipeline/covariance_stage.h"

namespace thirdrung {

namespace {

InterceptResult intercept_of(const StandardisedRun& one, const std::vector<bool>& used,
                             std::vector<SystematicShift> others) {
  const auto places = places_of(used);
  for (SystematicShift& other : others) other.shift = other.shift(places).eval();
  const Magnitudes some = some_of(one.magnitudes, used);
  // The errors of alpha, beta and gamma do not weigh, and so are left out.
  const CovarianceModel model = make_covariance(one.run, some, {}, std::move(others));
  return fit_intercept({some.supernovae, model.total(), {}}, one.run.intercept.options);
}

}  // namespace

double common_shift_of_weights(const StandardisedRun& baseline, const StandardisedRun& moved,
                               const Eigen::VectorXd& shift, const std::vector<bool>& used,
                               const std::vector<SystematicShift>& others) {
  const InterceptResult before = intercept_of(baseline, used, others);
  const InterceptResult after = intercept_of(moved, used, others);
  return -5.0 * (after.a_b - before.a_b) - before.weights.dot(shift(places_of(used)));
}

}  // namespace thirdrung
