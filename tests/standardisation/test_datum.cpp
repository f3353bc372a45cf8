#include <Eigen/LU>
#include <catch2/catch.hpp>
#include <cmath>

#include "base/chi_square.h"
#include "base/error.h"
#include "standardisation/datum.h"
#include "standardisation/host_mass.h"

using namespace thirdrung;

namespace {

StandardisationDatum datum(const std::string& name, const std::string& survey, double m_b, double error) {
  StandardisationDatum d;
  d.name = name;
  d.surveys = {survey};
  d.m_b = m_b;
  d.s = 1.0;
  d.c = 0.0;
  d.modulus = 35.0;
  d.covariance = error * error * Eigen::Matrix3d::Identity();
  return d;
}

}  // namespace

// Source: scipy.stats.chi2.sf of scipy 1.10. Tolerance: both are double precision, relative 1e-11 leaves room for
// rounding.
TEST_CASE("chi-square survival function agrees with scipy", "[published]") {
  CHECK(chi_square_survival(3.84, 1) == Approx(0.05004352124870519).epsilon(1e-11));
  CHECK(chi_square_survival(150.0, 200) == Approx(0.996647558501813).epsilon(1e-11));
  CHECK(chi_square_survival(300.0, 200) == Approx(5.924540335483916e-06).epsilon(1e-9));
  CHECK(chi_square_survival(0.0, 3) == 1.0);
}

TEST_CASE("two surveys' fits of one supernova become one with inverse-variance weights") {
  std::vector<StandardisationDatum> rows = {datum("A", "north", 15.0, 0.1), datum("B", "north", 16.0, 0.1),
                                            datum("A", "south", 15.3, 0.2)};
  rows[2].host_log_mass = 10.4;
  rows[2].covariance(0, 2) = rows[2].covariance(2, 0) = 0.02;
  const auto combined = combine_surveys(rows);
  REQUIRE(combined.size() == 2);
  CHECK(combined[0].datum.surveys == std::vector<std::string>{"north", "south"});
  CHECK(combined[0].datum.host_log_mass == 10.4);
  const Eigen::Matrix3d w1 = rows[0].covariance.inverse();
  const Eigen::Matrix3d w2 = rows[2].covariance.inverse();
  const Eigen::Vector3d x1(15.0, 1, 0);
  const Eigen::Vector3d x2(15.3, 1, 0);
  const Eigen::Vector3d mean = (w1 + w2).inverse() * (w1 * x1 + w2 * x2);
  CHECK(combined[0].datum.m_b == Approx(mean[0]).epsilon(1e-12));
  CHECK(combined[0].datum.c == Approx(mean[2]).margin(1e-12));
  // The disagreement of two is that of their difference, with the sum of the covariances.
  const Eigen::Vector3d difference = x2 - x1;
  CHECK(combined[0].disagreement_chi2 ==
        Approx(difference.dot((rows[0].covariance + rows[2].covariance).inverse() * difference)));
  CHECK(combined[0].disagreement_dof == 3);
  CHECK(combined[1].disagreement_dof == 0);
}

TEST_CASE("unusable fits are named") {
  std::vector<StandardisationDatum> rows = {datum("A", "north", 15.0, 0.1)};
  rows[0].covariance(0, 1) = 1.0;
  CHECK_THROWS_WITH(combine_surveys(rows), Catch::Contains("supernova A"));
  rows[0] = datum("A", "north", std::nan(""), 0.1);
  CHECK_THROWS_AS(check_data(rows), InputError);
  rows = {datum("A", "north", 15.0, 0.1), datum("A", "south", 15.0, 0.1)};
  CHECK_THROWS_WITH(check_data(rows), Catch::Contains("twice"));
}

// Source: the normal distribution's one-sigma point, 0.8413447 (Abramowitz & Stegun 1964, table 26.1); printed digits.
TEST_CASE("host-mass probability follows the normal distribution", "[published]") {
  CHECK(host_mass_probability(10.1, 0.1) == Approx(0.8413447460685429).epsilon(1e-9));
  CHECK(host_mass_probability(10.0, 0.3) == 0.5);
  CHECK(host_mass_probability(std::nan(""), 0.1) == 0.5);
  HostMassOptions options;
  options.probability_when_absent = 0.7;
  CHECK(host_mass_probability(std::nan(""), 0.1, options) == 0.7);
  options.step = 10.5;
  options.mass_offset = 0.5;
  CHECK(host_mass_probability(10.2, std::nan(""), options) == Approx(host_mass_probability(10.2, 0.2)));
}

// Source: sigma(m) = 5 sigma_v / (ln 10 c z); at z = 0.01 and 250 km/s that is 0.18108 mag (2.171472 x 0.0833910).
TEST_CASE("velocity scatter in magnitudes") {
  CHECK(std::sqrt(flow_variance(0.01, 250.0, 0.0)) == Approx(0.1810813).epsilon(1e-5));
  CHECK(std::sqrt(flow_variance(0.02, 0.0, 0.0002)) == Approx(0.0217147).epsilon(1e-5));
}
