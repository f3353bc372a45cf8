#include "report/digits.h"

#include <catch2/catch.hpp>
#include <cmath>

using namespace thirdrung;

TEST_CASE("an error keeps two significant digits and the value follows", "[report]") {
  CHECK(decimals_for(0.0017) == 4);
  CHECK(decimals_for(0.0996) == 2);  // Not 0.100.
  CHECK(decimals_for(0.0994) == 3);
  CHECK(decimals_for(12) == 0);
  CHECK(decimals_for(1234) == 0);
  CHECK(with_error(0.714480, 0.002826) == "0.7145 ± 0.0028");
  CHECK(with_error(-19.2512, 0.0371) == "−19.251 ± 0.037");
  CHECK(signed_with_error(0.00123, 0.00045) == "+0.00123 ± 0.00045");
  CHECK(signed_with_error(-0.00123, 0.00045) == "−0.00123 ± 0.00045");
}

TEST_CASE("numbers without an error, and numbers that are none", "[report]") {
  CHECK(with_error(1.23456, NAN) == "1.235");
  CHECK(with_error(NAN, 0.1) == "–");
  CHECK(fixed(-0.0004, 3) == "0.000");
  CHECK(signed_fixed(0.0004, 3) == "0.000");
  CHECK(signed_fixed(0.5, 1) == "+0.5");
  CHECK(counted(1, "supernova", "supernovae") == "1 supernova");
  CHECK(counted(0, "supernova", "supernovae") == "0 supernovae");
}

TEST_CASE("rounding to significant digits", "[report]") {
  CHECK(rounded(123456.789, 3) == 123000.0);
  CHECK(rounded(0.000123456, 3) == Approx(0.000123).epsilon(1e-12));
  CHECK(rounded(0.0, 3) == 0.0);
  CHECK(std::isnan(rounded(NAN, 3)));
}
