#include <catch2/catch.hpp>
#include <cmath>

#include "base/error.h"
#include "light/spectrum.h"

using namespace thirdrung;
using Catch::Matchers::Contains;

namespace {

Table spectrum_table(std::vector<double> wavelength, std::vector<double> flux,
                     const std::string& wavelength_unit = "Angstrom",
                     const std::string& flux_unit = "erg / (Angstrom cm2 s)") {
  Table table("star.ecsv");
  table.add_reals("wavelength", std::move(wavelength), wavelength_unit);
  table.add_reals("flux", std::move(flux), flux_unit);
  return table;
}

}  // namespace

TEST_CASE("a spectrum is linear between its points and zero outside", "[light]") {
  const Spectrum spectrum = read_spectrum(spectrum_table({4000, 5000, 7000}, {1, 3, 2}));
  CHECK(spectrum.at(4000) == 1);
  CHECK(spectrum.at(4500) == Approx(2));
  CHECK(spectrum.at(6000) == Approx(2.5));
  CHECK(spectrum.at(7000) == 2);
  CHECK(spectrum.at(3999.9) == 0);
  CHECK(spectrum.at(7000.1) == 0);
}

// 1 nm = 10 A; 1 W m^-2 um^-1 = 1e7 erg/s / 1e4 cm2 / 1e4 A = 0.1 erg s^-1 cm^-2 A^-1.
TEST_CASE("units of a spectrum are converted", "[light]") {
  const Spectrum spectrum = read_spectrum(spectrum_table({400, 500}, {1, 3}, "nm", "W / (m2 um)"));
  CHECK(spectrum.wavelength[1] == Approx(5000));
  CHECK(spectrum.flux[1] == Approx(0.3));
}

TEST_CASE("bad spectra are refused with file, row and column", "[light][badinput]") {
  CHECK_THROWS_WITH(read_spectrum(spectrum_table({4000, 4000, 5000}, {1, 1, 1})),
                    Contains("star.ecsv, row 2, column wavelength") && Contains("does not increase"));
  CHECK_THROWS_WITH(read_spectrum(spectrum_table({4000, 5000}, {1, NAN})), Contains("row 2, column flux"));
  CHECK_THROWS_WITH(read_spectrum(spectrum_table({4000, 5000}, {1, 1}, "Angstrom", "mag")), Contains("flux"));
  CHECK_THROWS_WITH(read_spectrum(spectrum_table({4000, 5000}, {1, 1}, "")), Contains("wavelength"));
  CHECK_THROWS_AS(read_spectrum(spectrum_table({4000}, {1})), InputError);
}
