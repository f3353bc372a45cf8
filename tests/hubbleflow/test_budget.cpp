#include <fmt/format.h>

#include <catch2/catch.hpp>
#include <cmath>

#include "base/error.h"
#include "hubbleflow/budget.h"
#include "hubbleflow/intercept.h"
#include "noisy_flow.h"

using namespace thirdrung;
using thirdrung::testing::exact_flow;
using thirdrung::testing::example_model;

TEST_CASE("budget parts add up to the total error, correlations included") {
  FlowSample sample = exact_flow(120, 0.71, 31);
  CovarianceModel model = example_model(sample, 12, 4);
  model.correlation = Eigen::MatrixXd::Identity(12, 12);
  model.correlation(0, 2) = model.correlation(2, 0) = 0.7;
  model.correlation(1, 4) = model.correlation(4, 1) = -0.5;
  check_covariance_model(model);
  sample.covariance = model.total();
  CHECK(sample.covariance == sample.covariance.transpose());
  const InterceptResult result = fit_intercept(sample);
  const CovarianceModel used = cut(model, result.used);
  const Budget budget = make_budget(used, result.weights);
  CHECK(budget.error == Approx(result.error).epsilon(1e-6));
  for (const auto* rows : {&budget.rows, &budget.by_kind}) {
    double sum = 0.0;
    for (const BudgetRow& row : *rows) sum += row.variance_share;
    CHECK(std::sqrt(sum) == Approx(result.error).epsilon(1e-6));
  }
  CHECK(budget.rows.size() == 14);
  CHECK(budget.by_kind.size() == 4);
  CHECK(budget.rows[0].variance_share >= budget.rows[1].variance_share);
  CHECK(budget.rows[0].h0_percent == Approx(100.0 * std::log(10.0) * budget.rows[0].ab_contribution));
  CHECK(std::hypot(budget.error_stat, budget.error_sys) == Approx(budget.error));
}

TEST_CASE("derivatives say how the intercept moves") {
  FlowSample sample = exact_flow(80, 0.71, 32);
  const CovarianceModel model = example_model(sample, 3, 5);
  const InterceptResult before = fit_intercept(sample);
  const auto derivatives = input_derivatives(cut(model, before.used), before.weights);
  for (std::size_t i = 0; i < 80; ++i)
    sample.supernovae[i].m_b_standardised += model.systematics[1].shift[static_cast<Eigen::Index>(i)];
  CHECK(derivatives[1].d_ab * model.systematics[1].size ==
        Approx(fit_intercept(sample).a_b - before.a_b).epsilon(1e-9));
  CHECK(derivatives[1].input == "zero point 2");
}

TEST_CASE("shifts of expansion and redshift agree with refits") {
  const FlowSample sample = exact_flow(80, 0.71, 33);
  InterceptOptions options;
  const InterceptResult before = fit_intercept(sample, options);
  const auto places = places_of(before.used);
  const Eigen::VectorXd q0 = expansion_shift(sample.supernovae, options.flow, 0.1, 0.0);
  InterceptOptions changed = options;
  changed.flow.expansion.q0 += 0.1;
  CHECK(-0.2 * before.weights.dot(q0(places)) == Approx(fit_intercept(sample, changed).a_b - before.a_b).epsilon(1e-9));
  // Source: d a_B = dz/(z ln 10) to first order at low redshift, 4e-5 at z = 0.05 is 3.5e-4.
  const Eigen::VectorXd dz = redshift_shift(sample.supernovae, options.flow, 4e-5);
  for (std::size_t i = 0; i < 80; ++i) {
    const double z = sample.supernovae[i].z_flow;
    CHECK(-0.2 * dz[static_cast<Eigen::Index>(i)] == Approx(4e-5 / (z * std::log(10.0))).epsilon(0.15));
  }
}

TEST_CASE("unsound covariance models are named") {
  const FlowSample sample = exact_flow(20, 0.71, 34);
  CovarianceModel model = example_model(sample, 2, 6);
  model.systematics[1].shift.conservativeResize(19);
  CHECK_THROWS_WITH(check_covariance_model(model), Catch::Contains("zero point 2"));
  model = example_model(sample, 2, 6);
  model.parts[0].diagonal[3] = std::nan("");
  CHECK_THROWS_WITH(check_covariance_model(model), Catch::Contains("'fit'"));
  model = example_model(sample, 2, 6);
  model.correlation = Eigen::MatrixXd::Constant(2, 2, 1.5);
  CHECK_THROWS_AS(check_covariance_model(model), InputError);
}

TEST_CASE("a standardised sample becomes a covariance model") {
  const FlowSample sample = exact_flow(30, 0.71, 35);
  std::vector<StandardisedMagnitude> magnitudes;
  for (const auto& s : sample.supernovae) {
    StandardisedMagnitude m;
    m.name = s.name;
    m.fit_variance = 0.004;
    m.intrinsic_variance = 0.01;
    magnitudes.push_back(m);
  }
  CovarianceModel model = statistical_model(sample.supernovae, magnitudes, {}, 250.0);
  Eigen::MatrixXd shifts = Eigen::MatrixXd::Constant(30, 3, 0.002);
  shifts.col(0).setZero();
  add_coefficient_shifts(model, shifts);
  check_covariance_model(model);
  CHECK(model.systematics.size() == 2);
  const Eigen::MatrixXd total = model.total();
  const double velocity = 5.0 * velocity_response(sample.supernovae[4].z_flow, {}) * 250.0 / 299792.458;
  CHECK(total(4, 4) == Approx(0.014 + velocity * velocity + 8e-6));
  CHECK(total(4, 5) == Approx(8e-6));
  magnitudes[3].name = "other";
  CHECK_THROWS_AS(statistical_model(sample.supernovae, magnitudes, {}, 250.0), std::logic_error);
}
