#include <catch2/catch.hpp>

#include "simulated_set.h"
#include "standardisation/hierarchical.h"
#include "standardisation/standardisation.h"

using namespace thirdrung;
using thirdrung::testing::simulated_set;

TEST_CASE("standardised magnitude is the formula") {
  StandardisationDatum d;
  d.name = "A";
  d.m_b = 16.0;
  d.s = 1.1;
  d.c = 0.05;
  d.covariance << 0.01, 0.0, 0.002, 0.0, 0.0004, 0.0, 0.002, 0.0, 0.0009;
  d.host_log_mass = 12.0;
  d.host_log_mass_error = 0.1;
  const auto m = standardise(std::span(&d, 1), {1.5, 3.0, 0.06, 0.1}, {});
  CHECK(m[0].magnitude == Approx(16.0 + 0.15 - 0.15 + 0.03));
  CHECK(m[0].fit_variance == Approx(0.01 + 2.25 * 0.0004 + 9 * 0.0009 - 2 * 3 * 0.002));
  CHECK(m[0].intrinsic_variance == Approx(0.01));
}

TEST_CASE("shifts of the coefficients carry their covariance") {
  const auto data = simulated_set(150, 2);
  const StandardisationResult fit = fit_hierarchical(data);
  const Eigen::MatrixXd shifts = coefficient_shifts(data, fit, {});
  // Along one supernova: variance of (s - 1) alpha - c beta + (P - 1/2) gamma.
  const double p = fit.magnitudes[7].mass_probability;
  Eigen::VectorXd j = Eigen::VectorXd::Zero(fit.covariance.rows());
  j[1] = data[7].s - 1.0;
  j[2] = -data[7].c;
  j[3] = p - 0.5;
  CHECK(fit.parameters[1].name == "alpha");
  CHECK(shifts.row(7).squaredNorm() == Approx(j.dot(fit.covariance * j)).epsilon(1e-9));
}
