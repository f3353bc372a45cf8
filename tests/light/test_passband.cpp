#include <algorithm>
#include <catch2/catch.hpp>
#include <cmath>
#include <functional>
#include <utility>
#include <vector>

#include "base/constants.h"
#include "base/error.h"
#include "light/passband.h"

using namespace thirdrung;
using Catch::Matchers::Contains;

namespace {

constexpr double hc = constants::planck_times_c_erg_angstrom;

/// Midpoint sum of so many steps that its error is far below the tolerances here.
double brute_integral(double a, double b, const std::function<double(double)>& g) {
  const int steps = 2'000'000;
  const double step = (b - a) / steps;
  double sum = 0;
  for (int i = 0; i < steps; ++i) sum += g(a + (i + 0.5) * step);
  return sum * step;
}

Passband triangle(Response response = Response::photon) {
  return {"triangle", {1000, 2000, 4000}, {0, 1, 0}, response, "triangle.ecsv"};
}

}  // namespace

// Worked by hand in units of 1000 A: T = λ−1 on [1, 2] and (4−λ)/2 on [2, 4], f = λ: ∫ f T λ dλ = 17/12 + 22/3 = 8.75.
// Tolerance: rounding of doubles.
TEST_CASE("photon rate of straight lines is exact", "[light]") {
  const Spectrum rising{{500, 5000}, {500, 5000}};
  CHECK(triangle().photon_rate(rising) * hc == Approx(8.75e9).epsilon(1e-13));
}

TEST_CASE("photon rate walks the merged grid of spectrum and passband", "[light]") {
  const Spectrum bent{{900, 1500, 1501, 2600, 3000, 3700}, {3, 0.5, 7, 1, 4, 2}};
  const Passband band = triangle();
  const double sum = brute_integral(1000, 3700, [&](double x) { return bent.at(x) * band.throughput_at(x) * x; });
  CHECK(band.photon_rate(bent) * hc == Approx(sum).epsilon(1e-9));

  SECTION("points on the lines change nothing") {
    Spectrum finer;
    for (double x = 900; x <= 3700; x += 1) {
      finer.wavelength.push_back(x);
      finer.flux.push_back(bent.at(x));
    }
    CHECK(band.photon_rate(finer) == Approx(band.photon_rate(bent)).epsilon(1e-12));
  }
  SECTION("no light outside the spectrum") {
    CHECK(band.photon_rate(Spectrum{{4000, 5000}, {1, 1}}) == 0);
    CHECK(band.photon_rate(Spectrum{{100, 1000}, {1, 1}}) == 0);
    CHECK(band.photon_rate(Spectrum{}) == 0);
    CHECK(std::isinf(ab_magnitude(Spectrum{}, band)));
  }
}

// f_ν = 3631 Jy is magnitude 0 by definition (Oke & Gunn 1983), a hundredth of it magnitude 5. The spectrum here is
// c f_ν/λ² sampled every angstrom, so the tolerance is that of straight lines between its points.
TEST_CASE("a source of constant f_nu has its AB magnitude in any passband", "[light]") {
  Spectrum flat;
  for (double x = 900; x <= 4100; x += 1) {
    flat.wavelength.push_back(x);
    flat.flux.push_back(36.31 * constants::jansky_cgs * constants::speed_of_light_angstrom_s / (x * x));
  }
  CHECK(ab_magnitude(flat, triangle()) == Approx(5).margin(1e-6));
  CHECK(ab_magnitude(flat, triangle(Response::energy)) == Approx(5).margin(1e-6));
}

TEST_CASE("an energy response is divided by wavelength and keeps its largest value", "[light]") {
  const Passband energy{"e", {1000, 2000, 3000, 4000}, {0.2, 0.8, 0.9, 0.1}, Response::energy};
  CHECK(*std::max_element(energy.throughput().begin(), energy.throughput().end()) == Approx(0.9));
  CHECK(energy.throughput()[0] / energy.throughput()[3] == Approx((0.2 / 1000) / (0.1 / 4000)));
}

TEST_CASE("shape of a passband", "[light]") {
  const Passband band{"padded", {500, 900, 1000, 2000, 4000, 4500}, {0, 0, 0, 1, 0, 0}, Response::photon};
  CHECK(band.blue_edge() == 1000);
  CHECK(band.red_edge() == 4000);
  CHECK(band.throughput_at(1500) == Approx(0.5));
  CHECK(band.throughput_at(3000) == Approx(0.5));
  CHECK(band.throughput_at(499) == 0);
  CHECK(band.throughput_at(4501) == 0);

  // ∫λ²T dλ = 8.75e9 as above and ∫λT dλ = 5/6e6 + 8/3e6, by hand.
  CHECK(band.mean_wavelength() == Approx(8.75e9 / (3.5e6)).epsilon(1e-13));

  const auto [blue, red] = band.core_range(0.02);
  const auto photons = [&](double x) { return x * band.throughput_at(x); };
  const double all = brute_integral(1000, 4000, photons);
  CHECK(brute_integral(1000, blue, photons) / all == Approx(0.01).epsilon(1e-6));
  CHECK(brute_integral(red, 4000, photons) / all == Approx(0.01).epsilon(1e-6));
  CHECK(band.core_range(0) == std::pair{1000.0, 4000.0});

  const Passband moved = band.shifted(10);
  CHECK(moved.blue_edge() == 1010);
  CHECK(moved.throughput_at(2010) == Approx(1));
  CHECK(moved.id() == "padded");
}

TEST_CASE("a curve that is cut off keeps its last point as edge", "[light]") {
  const Passband cut{"cut", {1000, 2000, 3000}, {0.5, 1, 0.5}, Response::photon};
  CHECK(cut.blue_edge() == 1000);
  CHECK(cut.red_edge() == 3000);
}

TEST_CASE("bad passbands are refused with file, row and column", "[light][badinput]") {
  const auto make = [](std::vector<double> wavelength, std::vector<double> throughput) {
    return Passband("x", std::move(wavelength), std::move(throughput), Response::photon, "x.ecsv");
  };
  CHECK_THROWS_WITH(make({1, 3, 2, 4}, {0, 1, 1, 0}),
                    Contains("x.ecsv, row 3, column wavelength") && Contains("does not increase"));
  CHECK_THROWS_WITH(make({1, 2, 2}, {0, 1, 0}), Contains("row 3") && Contains("does not increase"));
  CHECK_THROWS_WITH(make({1, 2, 3}, {0, -0.1, 0}), Contains("row 2, column throughput") && Contains("negative"));
  CHECK_THROWS_WITH(make({1, 2, 3}, {0, NAN, 0}), Contains("row 2, column throughput"));
  CHECK_THROWS_WITH(make({1, NAN, 3}, {0, 1, 0}), Contains("row 2, column wavelength"));
  CHECK_THROWS_WITH(make({1, 2, 3}, {0, 0, 0}), Contains("every throughput"));
  CHECK_THROWS_WITH(make({1, 2}, {1, 1}), Contains("at least three"));
  CHECK_THROWS_AS(make({1, 3, 2, 4}, {0, 1, 1, 0}), InputError);
}
