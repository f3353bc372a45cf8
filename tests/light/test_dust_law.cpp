#include <catch2/catch.hpp>
#include <cmath>
#include <utility>
#include <vector>

#include "base/error.h"
#include "light/dust_law.h"

using namespace thirdrung;
using Catch::Matchers::Contains;

// Source: Fitzpatrick 1999, PASP 111, 63, Table 3 (A(λ)/E(B-V) of the R = 3.1 curve at the anchors of its spline);
// figures from memory. The last two are not stored here but follow from the ultraviolet formula, so they check its
// coefficients. Tolerance: the last printed digit.
TEST_CASE("Fitzpatrick 1999 at its published anchors", "[light][published]") {
  const std::vector<std::pair<double, double>> table = {{26500, 0.265}, {12200, 0.829}, {6000, 2.688}, {5470, 3.055},
                                                        {4670, 3.806},  {4110, 4.315},  {2700, 6.265}, {2600, 6.591}};
  const Extinction dust(DustLaw::fitzpatrick99, 3.1);
  for (const auto& [wavelength, expected] : table) {
    CAPTURE(wavelength);
    CHECK(dust.magnitudes(wavelength, 1) == Approx(expected).margin(0.00051));
    CHECK(dust.relative(wavelength) == Approx(expected / 3.1).margin(0.0002));
  }
  CHECK(dust.magnitudes(5470, 0.2) == Approx(0.2 * 3.05496).margin(1e-9));
}

// E(B-V) = A(B) - A(V) by definition, with the effective wavelengths 4400 and 5500 A. The curves are anchored to broad
// bands, not to these wavelengths, which leaves a few hundredths; R_V = A(V)/E(B-V) is met to 0.04.
TEST_CASE("both laws redden by E(B-V) at any R_V", "[light]") {
  for (const double r_v : {2.3, 3.1, 5.0}) {
    for (const DustLaw law : {DustLaw::odonnell94, DustLaw::fitzpatrick99}) {
      CAPTURE(r_v, name_of(law));
      const Extinction dust(law, r_v);
      CHECK(dust.magnitudes(4400, 1) - dust.magnitudes(5500, 1) == Approx(1).margin(0.06));
      CHECK(dust.magnitudes(5500, 1) / r_v == Approx(1).margin(0.04));
    }
  }
}

TEST_CASE("the laws are smooth where their pieces meet and held outside", "[light]") {
  for (const double r_v : {2.3, 3.1, 5.0}) {
    const Extinction f99(DustLaw::fitzpatrick99, r_v);
    CHECK(f99.relative(2699.99) == Approx(f99.relative(2700.01)).epsilon(1e-4));
    CHECK(f99.relative(100) == f99.relative(910));
    CHECK(f99.relative(1e6) == f99.relative(60000));
    const Extinction o94(DustLaw::odonnell94, r_v);
    CHECK(o94.relative(1e4 / 1.0999) == Approx(o94.relative(1e4 / 1.1001)).epsilon(0.01));
    CHECK(o94.relative(1e4 / 3.2999) == Approx(o94.relative(1e4 / 3.3001)).epsilon(0.01));
    CHECK(o94.relative(1e4 / 7.9999) == Approx(o94.relative(1e4 / 8.0001)).epsilon(0.01));
    CHECK(o94.relative(100) == o94.relative(1000));
    CHECK(o94.relative(1e6) == o94.relative(33000));
  }
}

// Source: Schlegel, Finkbeiner & Davis 1998, ApJ 500, 525, Table 6: A/A(V) of O'Donnell's law with R_V = 3.1 at the
// effective wavelength of each filter, where the curve equals the extinction in the filter. Figures checked against a
// public copy of the table. Tolerance: their wavelengths are rounded to 1 A and A(V) there is that of a filter: 0.005
// covers it.
TEST_CASE("O'Donnell 1994 at the effective wavelengths of Schlegel et al. 1998", "[light][published]") {
  const std::vector<std::pair<double, double>> table = {
      {3372, 1.664},  {4404, 1.321}, {5428, 1.015}, {6509, 0.819}, {8090, 0.594},  {3683, 1.521},
      {4393, 1.324},  {5519, 0.992}, {6602, 0.807}, {8046, 0.601}, {12660, 0.276}, {16732, 0.176},
      {22152, 0.112}, {5244, 1.065}, {6707, 0.793}, {7985, 0.610}, {9055, 0.472},  {3546, 1.579},
      {4925, 1.161},  {6335, 0.843}, {7799, 0.639}, {9294, 0.453}, {3047, 1.791}};
  const Extinction dust(DustLaw::odonnell94, 3.1);
  for (const auto& [wavelength, expected] : table) {
    CAPTURE(wavelength);
    CHECK(dust.relative(wavelength) == Approx(expected).margin(0.005));
  }
}

// Source: Cardelli, Clayton & Mathis 1989, ApJ 345, 245, Table 3, J, H, K of R_V = 3.1 (checked against a public copy),
// where O'Donnell changed nothing; and eqs. 4 and 5 worked by hand at x = 4.6 (the bump) and x = 9.
// Tolerance: 0.003, since the table gives x in two digits (0.002 in H); 1e-6 for the worked values.
TEST_CASE("Cardelli et al. 1989 outside the optical", "[light][published]") {
  const Extinction dust(DustLaw::odonnell94, 3.1);
  CHECK(dust.relative(1e4 / 0.80) == Approx(0.282).margin(0.003));
  CHECK(dust.relative(1e4 / 0.63) == Approx(0.190).margin(0.003));
  CHECK(dust.relative(1e4 / 0.46) == Approx(0.114).margin(0.003));
  const double a_bump = 1.752 - 0.316 * 4.6 - 0.104 / (0.07 * 0.07 + 0.341);
  const double b_bump = -3.090 + 1.825 * 4.6 + 1.206 / (0.02 * 0.02 + 0.263);
  CHECK(dust.relative(1e4 / 4.6) == Approx(a_bump + b_bump / 3.1).margin(1e-6));
  CHECK(dust.relative(1e4 / 9.0) ==
        Approx(-1.073 - 0.628 + 0.137 - 0.070 + (13.670 + 4.257 - 0.420 + 0.374) / 3.1).margin(1e-6));
}

TEST_CASE("bad dust settings are refused", "[light][badinput]") {
  CHECK(dust_law_from_name(name_of(DustLaw::odonnell94)) == DustLaw::odonnell94);
  CHECK(dust_law_from_name(name_of(DustLaw::fitzpatrick99)) == DustLaw::fitzpatrick99);
  CHECK_THROWS_WITH(dust_law_from_name("fitzpatrik99", {"run.toml", 7, "dust_law"}),
                    Contains("run.toml, row 7, column dust_law") && Contains("did you mean \"fitzpatrick99\""));
  CHECK_THROWS_WITH(dust_law_from_name("zzz"), Contains("odonnell94"));
  CHECK_THROWS_WITH(Extinction(DustLaw::fitzpatrick99, 1.5), Contains("outside 2 to 6"));
  CHECK_THROWS_AS(Extinction(DustLaw::odonnell94, NAN), InputError);
}
