#include <fmt/format.h>

#include <Eigen/LU>
#include <catch2/catch.hpp>
#include <cmath>
#include <random>

#include "base/error.h"
#include "hubbleflow/intercept.h"
#include "published_sample.h"
#include "simulated_flow.h"
#include "sky/position.h"

using namespace thirdrung;
using thirdrung::testing::exact_flow;
using thirdrung::testing::published_sample;

// Source: H0 = 73.04 and M_B = -19.253 (Riess et al. 2022, ApJL 934, L7, their baseline), so that a_B = log10 H0 - 5 -
// 0.2 M_B = 0.71416. Tolerance 0.002: their fit weighs with the full published covariance, we with its diagonal and 250
// km/s.
TEST_CASE("published standardised magnitudes give the published intercept", "[published][realdata]") {
  THIRDRUNG_NEEDS_REAL_DATA(folder);
  const FlowSample sample = published_sample(folder, 250.0);
  CHECK(sample.supernovae.size() == 190);
  const double implied = std::log10(73.04) - 5.0 + 0.2 * 19.253;
  for (const bool helio_factor : {true, false}) {
    InterceptOptions options;
    options.flow.helio_factor = helio_factor;
    const InterceptResult result = fit_intercept(sample, options);
    fmt::print("published rows, helio factor {}: a_B = {:.5f} +- {:.5f} (implied {:.5f}), scatter {:.4f} mag\n",
               helio_factor, result.a_b, result.error, implied, result.scatter_mag);
    CHECK(result.a_b == Approx(implied).margin(0.002));
    for (const double z_min : {0.03, 0.04}) {
      InterceptOptions cut_options = options;
      cut_options.z_min = z_min;
      const InterceptResult higher = fit_intercept(sample, cut_options);
      // For nested samples with optimal weights the variance of the difference is the difference of the variances.
      const double error = std::sqrt(higher.error * higher.error - result.error * result.error);
      fmt::print("  z_min {}: difference {:+.5f} +- {:.5f}\n", z_min, higher.a_b - result.a_b, error);
      CHECK(std::abs(higher.a_b - result.a_b) < 2.0 * error);
    }
  }
}

TEST_CASE("noiseless supernovae give their intercept back, with any free parameters") {
  FlowOptions flow;
  flow.expansion = Expansion::series(-0.4, 1.0);
  const FlowSample sample = exact_flow(60, 0.71, 1, flow);
  InterceptOptions options;
  options.z_min = 0.0;
  options.fit_q0 = true;
  options.fit_dipole = true;
  const InterceptResult result = fit_intercept(sample, options);
  CHECK(result.a_b == Approx(0.71).epsilon(1e-9));
  CHECK(*result.q0 == Approx(-0.4).epsilon(1e-6));
  CHECK(result.dipole->amplitude < 1e-3);
  CHECK(result.weights.sum() == Approx(1.0).epsilon(1e-12));
  CHECK(result.dof == 55);
}

TEST_CASE("a bulk velocity in the redshifts is found with its direction") {
  FlowSample sample = exact_flow(200, 0.71, 2);
  const UnitVector towards = unit_vector(120.0, -40.0);
  for (FlowSupernova& s : sample.supernovae) {
    // True redshift z_flow, velocity 400 km/s: both observed redshifts grow, and the flux falls by the Doppler factor's
    // square, one of the two powers being in (1 + z_helio) already.
    const double v = 400.0 / 299792.458 * dot(towards, unit_vector(s.ra, s.dec));
    s.z_flow = (1.0 + s.z_flow) * (1.0 + v) - 1.0;
    s.z_helio = (1.0 + s.z_helio) * (1.0 + v) - 1.0;
    s.m_b_standardised += 5.0 * std::log10((1.0 + v) * (1.0 + v));
  }
  InterceptOptions options;
  options.z_min = 0.0;
  options.fit_dipole = true;
  const InterceptResult result = fit_intercept(sample, options);
  const Galactic expected = galactic_from_icrs(120.0, -40.0);
  // Second-order terms in v/(c z), up to (400 / 3000)^2, are left.
  CHECK(result.dipole->amplitude == Approx(400.0).epsilon(0.02));
  CHECK(result.dipole->l == Approx(expected.l).margin(2.0));
  CHECK(result.dipole->b == Approx(expected.b).margin(2.0));
  CHECK(result.dipole->amplitude_error > 10.0);
  CHECK(result.a_b == Approx(0.71).margin(3e-4));
}

// Source: the textbook solution by explicit inverse, here for correlated noise.
TEST_CASE("weights follow the full covariance") {
  FlowSample sample = exact_flow(30, 0.71, 3);
  std::mt19937_64 engine(4);
  std::normal_distribution<double> normal;
  Eigen::VectorXd common(30);
  for (Eigen::Index i = 0; i < 30; ++i) {
    common[i] = 0.1 * normal(engine);
    sample.supernovae[static_cast<std::size_t>(i)].m_b_standardised += 0.1 * normal(engine);
  }
  sample.covariance += common * common.transpose();
  InterceptOptions options;
  options.z_min = 0.0;
  const InterceptResult result = fit_intercept(sample, options);
  const Eigen::MatrixXd inverse = (0.04 * sample.covariance).inverse();
  const Eigen::VectorXd ones = Eigen::VectorXd::Ones(30);
  const double information = ones.dot(inverse * ones);
  CHECK(result.a_b == Approx(ones.dot(inverse * result.single) / information).epsilon(1e-10));
  CHECK(result.error == Approx(1.0 / std::sqrt(information)).epsilon(1e-9));
  const Eigen::VectorXd r = result.single.array() - result.a_b;
  CHECK(result.chi2 == Approx(r.dot(inverse * r)).epsilon(1e-8));
}

TEST_CASE("unsound samples are refused in one sentence") {
  FlowSample sample = exact_flow(20, 0.71, 5);
  InterceptOptions options;
  options.z_min = 0.149;
  CHECK_THROWS_AS(fit_intercept(sample, options), NoResultError);
  options.z_min = 0.0;
  FlowSample bad = sample;
  bad.covariance(2, 3) = 0.001;
  CHECK_THROWS_WITH(fit_intercept(bad, options), Catch::Contains("not symmetric") && Catch::Contains("Q3"));
  bad.covariance(2, 3) = bad.covariance(3, 2) = 1.0;
  CHECK_THROWS_WITH(fit_intercept(bad, options), Catch::Contains("not positive definite"));
  bad.covariance = Eigen::MatrixXd::Identity(19, 19);
  CHECK_THROWS_WITH(fit_intercept(bad, options), Catch::Contains("19 by 19 for 20"));
  bad = sample;
  bad.supernovae[1].name = "Q1";
  CHECK_THROWS_WITH(fit_intercept(bad, options), Catch::Contains("twice"));
  bad = sample;
  bad.supernovae[1].z_flow = -0.01;
  CHECK_THROWS_AS(fit_intercept(bad, options), InputError);
  const std::vector<std::string> ids = {"Q1", "other"};
  CHECK_THROWS_WITH(in_order_of(sample.supernovae, ids, Eigen::MatrixXd::Identity(2, 2), "c.fits"),
                    Catch::Contains("lacks 19") && Catch::Contains("Q2"));
}
