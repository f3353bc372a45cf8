#include <catch2/catch.hpp>
#include <cmath>

#include "hubbleflow/budget.h"
#include "hubbleflow/covariance_model.h"
#include "hubbleflow/influence.h"
#include "hubbleflow/intercept.h"
#include "hubbleflow/scans.h"
#include "hubbleflow/simulated_flow.h"

using namespace thirdrung;
using thirdrung::testing::exact_flow;

namespace {

/// A sample whose magnitudes follow c, with the error of beta in its covariance but not in its weights.
struct Case {
  FlowSample sample;
  CovarianceModel model;
};

Case with_error_of_beta() {
  Case out;
  out.sample = exact_flow(80, 0.71, 5);
  const auto n = static_cast<Eigen::Index>(out.sample.supernovae.size());
  Eigen::VectorXd colour(n);
  for (Eigen::Index i = 0; i < n; ++i) {
    FlowSupernova& one = out.sample.supernovae[static_cast<std::size_t>(i)];
    one.c += 0.05;
    one.m_b_standardised += 0.6 * one.c;  // As of errors in c that standardisation leaves in the magnitude.
    colour[i] = one.c;
    out.model.supernovae.push_back(one.name);
  }
  out.model.parts.push_back({"own", "statistical", out.sample.covariance.diagonal(), {}});
  add_coefficient_shifts(out.model, -0.3 * colour);
  out.sample.covariance = out.model.total();
  out.sample.weighting = out.model.weighting();
  return out;
}

InterceptOptions whole_range() {
  InterceptOptions out;
  out.z_min = 0;
  out.z_max = 1;
  return out;
}

}  // namespace

TEST_CASE("errors of the coefficients count in the error of a_B but not in its weights") {
  const Case given = with_error_of_beta();
  const InterceptResult result = fit_intercept(given.sample, whole_range());

  FlowSample plain = given.sample;
  plain.covariance = given.model.parts[0].diagonal.asDiagonal();
  plain.weighting.resize(0, 0);
  const InterceptResult without = fit_intercept(plain, whole_range());
  CHECK(std::abs(result.a_b - without.a_b) < 1e-12);
  CHECK((result.weights - without.weights).norm() < 1e-12);
  // var(w . y) of a linear estimate, written out.
  CHECK(std::abs(result.error - 0.2 * std::sqrt(result.weights.dot(given.model.total() * result.weights))) < 1e-12);
  CHECK(result.error > without.error);
  // The budget takes the same error apart.
  CHECK(std::abs(make_budget(given.model, result.weights).error - result.error) < 1e-12);

  // Weights of the whole covariance would take the slope in c for an error of beta, and move a_B by the slope's
  // 0.6 x 0.05 mag at the mean c, 0.006, as far as the 80 supernovae outvote the 0.3 that beta is known to.
  FlowSample fitted = given.sample;
  fitted.weighting.resize(0, 0);
  CHECK(std::abs(fit_intercept(fitted, whole_range()).a_b - result.a_b) > 0.001);
}

TEST_CASE("scans and influence take the same weights") {
  const Case given = with_error_of_beta();
  const InterceptResult result = fit_intercept(given.sample, whole_range());
  const ScanFrame frame(given.sample, whole_range());
  std::vector<bool> members(given.sample.supernovae.size(), true);
  CHECK((frame.weights(members) - result.weights).norm() < 1e-10);
  // Against leaving one out for good.
  members[7] = false;
  const InterceptResult less = fit_intercept(cut(given.sample, members), whole_range());
  CHECK(std::abs(frame.estimate(frame.weights(members)) - less.a_b) < 1e-10);
  CHECK(std::abs(frame.error_of(frame.weights(members)) - less.error) < 1e-10);
  const auto rows = influence(frame);
  CHECK(std::abs(rows[7].delta_ab - (less.a_b - result.a_b)) < 1e-10);
}
