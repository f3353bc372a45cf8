#include <catch2/catch.hpp>
#include <cmath>
#include <numbers>
#include <stdexcept>

#include "tables/scratch_folder.h"
#include "tables/units.h"

using namespace thirdrung;
using thirdrung::testing::message_of;

namespace {

const Place kPlace{"sample.ecsv", {}, "flux"};

double factor(const std::string& from, const std::string& to) {
  return conversion_factor(from, to, kPlace);
}

std::string fault(const std::string& from, const std::string& to) {
  return message_of<InputError>([&] { factor(from, to); });
}

}  // namespace

// Source: SI prefixes and the definition of the units, FITS standard 4.0, tables 3 to 5 (1 Jy = 1e-26 W m-2 Hz-1;
// 1 Angstrom = 1e-10 m; 1 d = 86400 s). Powers of ten are exact. test_astropy.py compares more spellings.
TEST_CASE("powers of ten convert exactly", "[published]") {
  CHECK(factor("nJy", "uJy") == 1e-3);
  CHECK(factor("mJy", "uJy") == 1e3);
  CHECK(factor("Jy", "uJy") == 1e6);
  CHECK(factor("microJansky", "uJy") == 1);
  CHECK(factor("µJy", "uJy") == 1);
  CHECK(factor("MJy", "uJy") == 1e12);
  CHECK(factor("nm", "Angstrom") == 10);
  CHECK(factor("um", "Angstrom") == 1e4);
  CHECK(factor("micron", "nm") == 1e3);
  CHECK(factor("m / s", "km / s") == 1e-3);
  CHECK(factor("km s-1", "km / s") == 1);
  CHECK(factor("mmag", "mag") == 1e-3);
  CHECK(factor("W / (m2 Hz)", "Jy") == 1e26);
  CHECK(factor("1e-17 erg / (Angstrom cm2 s)", "erg / (Angstrom cm2 s)") == Approx(1e-17).epsilon(1e-15));
  CHECK(factor("10**-17 erg s-1 cm-2 Angstrom-1", "erg / (Angstrom cm2 s)") == Approx(1e-17).epsilon(1e-15));
}

TEST_CASE("times and angles convert", "[published]") {
  CHECK(factor("h", "d") == Approx(1.0 / 24).epsilon(1e-15));
  CHECK(factor("s", "d") == Approx(1.0 / 86400).epsilon(1e-15));
  CHECK(factor("rad", "deg") == Approx(180 / std::numbers::pi).epsilon(1e-15));
  CHECK(factor("arcsec", "deg") == Approx(1.0 / 3600).epsilon(1e-15));
  CHECK(factor("hourangle", "deg") == Approx(15).epsilon(1e-15));
}

TEST_CASE("one unit in many spellings") {
  for (const char* spelling :
       {"erg / (Angstrom cm2 s)", "erg/(s cm**2 Angstrom)", "erg.s**-1.cm**-2.Angstrom**-1", "erg s-1 cm-2 Angstrom-1",
        "erg/s/cm^2/AA", "erg * s^(-1) * cm^-2 / angstrom", " erg /( cm2  Angstrom s ) ", "1 erg / (Angstrom cm2 s)"}) {
    CAPTURE(spelling);
    CHECK(factor(spelling, "erg / (Angstrom cm2 s)") == 1);
  }
}

TEST_CASE("the logarithm of a mass is a dex") {
  CHECK(factor("dex(solMass)", "dex") == 1);
  CHECK(factor("dex", "dex(solMass)") == 1);
}

// Source: Oke & Gunn 1983, ApJ 266, 713: the AB system's zero is 3631 Jy.
TEST_CASE("maggies are on the AB scale", "[published]") {
  CHECK(factor("nmgy", "uJy") == Approx(3.631).epsilon(1e-15));
  CHECK(factor("nanomaggy", "uJy") == Approx(3.631).epsilon(1e-15));
}

TEST_CASE("a unit that does not do is refused in one sentence") {
  CHECK(fault("", "uJy") ==
        "sample.ecsv, column flux: has no unit; state its unit, \"uJy\" or one that converts to it.");
  CHECK(fault("mag", "uJy") ==
        "sample.ecsv, column flux: its unit \"mag\" is of another kind than \"uJy\"; give \"uJy\" or a unit that "
        "converts to it.");
  CHECK(fault("ujy", "uJy") ==
        "sample.ecsv, column flux: its unit \"ujy\" names the unknown unit \"ujy\" (the nearest is \"uJy\"); give "
        "\"uJy\" or a unit that converts to it.");
  CHECK(fault("d", "") ==
        "sample.ecsv, column flux: its unit \"d\" is of another kind than a pure number; give a pure number or a unit "
        "that converts to it.");
  for (const char* wrong :
       {"erg / (cm2", "Jy)", "Jy**", "*", "/", "Jy//s", "Jy^x", "1e999 Jy", "mag(AB)", "0 Jy", "+"}) {
    CAPTURE(wrong);
    CHECK_FALSE(fault(wrong, "uJy").empty());
  }
  CHECK_THROWS_AS(factor("uJy", "nonsense"), std::logic_error);
}

TEST_CASE("units are spelled for FITS") {
  CHECK(fits_spelling("km / s") == "km s-1");
  CHECK(fits_spelling("erg / (Angstrom cm2 s)") == "erg Angstrom-1 cm-2 s-1");
  CHECK(fits_spelling("uJy") == "uJy");
  CHECK(fits_spelling("dex(solMass)") == "dex(solMass)");
  CHECK(fits_spelling("furlong") == "furlong");
  CHECK(fits_spelling("").empty());
}
