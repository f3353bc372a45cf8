#include "report/trend.h"

#include <catch2/catch.hpp>
#include <cmath>
#include <random>

using namespace thirdrung;

// Worked by hand: points (0,1), (1,3), (2,4), equal errors 0.5. Slope 3/2; its error 0.5/√2; mean 8/3.
TEST_CASE("a straight line through three points", "[report]") {
  const std::vector<double> x{0, 1, 2}, y{1, 3, 4}, e{0.5, 0.5, 0.5};
  const Trend trend = fit_trend(x, y, e);
  CHECK(trend.slope == Approx(1.5));
  CHECK(trend.slope_error == Approx(0.5 / std::sqrt(2.0)));
  CHECK(trend.value_at_pivot == Approx(8.0 / 3));
  CHECK(std::isnan(fit_trend(std::vector<double>{1, 2}, std::vector<double>{1, 2}, std::vector<double>{1, 1}).slope));
}

TEST_CASE("points that are not finite are left out", "[report]") {
  const std::vector<double> x{0, 1, 2, NAN, 5}, y{1, 3, 4, 2, NAN}, e{0.5, 0.5, 0.5, 0.5, 0.5};
  CHECK(fit_trend(x, y, e).points == 3);
  CHECK(fit_trend(x, y, e).slope == Approx(1.5));
}

TEST_CASE("bins hold equal numbers and keep the mean", "[report]") {
  std::vector<double> x, y, e;
  for (int i = 0; i < 60; ++i) x.push_back(60 - i), y.push_back(i % 2 == 0 ? 1 : -1), e.push_back(2);
  const auto bins = binned_means(x, y, e, 6);
  REQUIRE(bins.size() == 6);
  for (const BinnedMean& bin : bins) {
    CHECK(bin.points == 10);
    CHECK(bin.mean == Approx(0).margin(1e-12));
    CHECK(bin.error == Approx(2 / std::sqrt(10.0)));
  }
  CHECK(binned_means(std::vector<double>{1, 2}, std::vector<double>{1, 2}, std::vector<double>{1, 1}, 5).empty());
}

// y holds -3 times the error of x and nothing else: the slope found must be the one foretold, within its own error (4
// σ).
TEST_CASE("errors on both axes make the slope that is foretold", "[report]") {
  std::mt19937 random(11);
  std::normal_distribution<double> normal;
  std::vector<double> x, y, e, covariance;
  for (int i = 0; i < 20000; ++i) {
    const double fault = 0.03 * normal(random);
    x.push_back(0.1 * normal(random) + fault);
    y.push_back(-3 * fault + 0.1 * normal(random));
    e.push_back(0.134);
    covariance.push_back(-3 * 0.03 * 0.03);
  }
  const Trend trend = fit_trend(x, y, e);
  CHECK(std::abs(trend.slope - slope_of_shared_errors(x, e, covariance)) < 4 * trend.slope_error);
  CHECK(trend.slope < -10 * trend.slope_error);
}
