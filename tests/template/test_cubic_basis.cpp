#include <catch2/catch.hpp>
#include <cmath>

#include "template/cubic_basis.h"

using namespace thirdrung;

namespace {
double spline(const CubicBasis& basis, const std::vector<double>& coefficients, double x, bool slope = false) {
  const auto w = slope ? basis.slope_at(x) : basis.at(x);
  double sum = 0;
  for (std::size_t k = 0; k < 4; ++k) sum += w.value[k] * coefficients[static_cast<std::size_t>(w.first) + k];
  return sum;
}
}  // namespace

// Source: scipy 1.10, scipy.interpolate.BSpline(t, c, 3) with t = [-2]*3 + [-2, -0.5, 0.7, 1, 4] + [4]*3 and
// c = [0.3, -1.2, 2.5, 0.4, 1.1, -0.7, 0.9], value and first derivative. Tolerance: rounding.
TEST_CASE("cubic basis agrees with scipy's B-splines", "[published]") {
  const CubicBasis basis({-2, -0.5, 0.7, 1, 4});
  const std::vector<double> c = {0.3, -1.2, 2.5, 0.4, 1.1, -0.7, 0.9};
  REQUIRE(basis.size() == 7);
  const double reference[][3] = {{-2, 0.3, -3.0},
                                 {-1.3, -0.013729309556470264, 1.3369272976680384},
                                 {-0.5, 1.1858024691358027, 0.6604938271604939},
                                 {0.1, 0.994641975308642, -0.8965432098765433},
                                 {0.69, 0.5919699967992684, -0.08055459533607695},
                                 {0.85, 0.6140268595041323, 0.29053719008264467},
                                 {1.0, 0.6608815426997248, 0.27548209366391185},
                                 {2.2, 0.40325950413223133, -0.43028099173553713},
                                 {3.999, 0.8984010785972046, 1.5978429962656877}};
  for (const auto& row : reference) {
    CHECK(spline(basis, c, row[0]) == Approx(row[1]).margin(1e-12));
    CHECK(spline(basis, c, row[0], true) == Approx(row[2]).margin(1e-11));
  }
}

// Source: de Boor 1978, ch. IX: B-splines are positive and sum to one; Marsden's identity: the Greville points are the
// coefficients of the straight line. Tolerance: rounding.
TEST_CASE("cubic basis sums to one and reproduces a straight line", "[published]") {
  const CubicBasis basis({0, 1, 1.5, 4, 4.25, 9});
  for (double x = 0; x <= 9; x += 0.01) {
    const auto w = basis.at(x);
    CHECK(w.value[0] + w.value[1] + w.value[2] + w.value[3] == Approx(1).epsilon(1e-14));
    for (const double v : w.value) CHECK(v >= -1e-15);
    CHECK(spline(basis, basis.centres(), x) == Approx(x).margin(1e-13));
    CHECK(spline(basis, basis.centres(), x, true) == Approx(1).epsilon(1e-12));
  }
}

TEST_CASE("cubic basis holds its end values outside") {
  const CubicBasis basis({0, 1, 2});
  const std::vector<double> c = {3, 1, 4, 1, 5};
  CHECK(spline(basis, c, -7) == 3);
  CHECK(spline(basis, c, 7) == 5);
  CHECK(spline(basis, c, 7, true) == 0);
}

TEST_CASE("cubic basis refuses breakpoints that do not increase") {
  CHECK_THROWS_AS(CubicBasis({1.0}), std::invalid_argument);
  CHECK_THROWS_AS(CubicBasis({0.0, 1.0, 1.0}), std::invalid_argument);
}
