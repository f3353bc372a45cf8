#include <fmt/format.h>
#include <unistd.h>

#include <catch2/catch.hpp>
#include <cmath>
#include <fstream>

#include "base/constants.h"
#include "base/error.h"
#include "light/passband_catalogue.h"

using namespace thirdrung;
using Catch::Matchers::Contains;
namespace fs = std::filesystem;

namespace {

/// A folder with one good curve and one catalogue, removed at the end.
class CatalogueFolder {
 public:
  CatalogueFolder() : folder_(fs::temp_directory_path() / fmt::format("catalogue-test-{}", ::getpid())) {
    fs::create_directories(folder_);
    write("good.ecsv", curve("4000,0\n5000,0.8\n6000,0\n"));
  }
  ~CatalogueFolder() {
    std::error_code ignored;
    fs::remove_all(folder_, ignored);
  }
  CatalogueFolder(const CatalogueFolder&) = delete;
  CatalogueFolder& operator=(const CatalogueFolder&) = delete;

  static std::string curve(const std::string& rows) {
    return "# %ECSV 1.0\n# ---\n# datatype:\n# - {name: wavelength, unit: Angstrom, datatype: float64}\n"
           "# - {name: throughput, datatype: float64}\n# delimiter: ','\n# meta: !!omap\n# - {response: photon}\n"
           "# schema: astropy-2.0\nwavelength,throughput\n" +
           rows;
  }

  void write(const std::string& name, const std::string& content) const { std::ofstream(folder_ / name) << content; }

  PassbandCatalogue read(const std::string& toml, const std::optional<Spectrum>& star = std::nullopt) const {
    write("catalogue.toml", toml);
    return PassbandCatalogue::read(folder_ / "catalogue.toml", star);
  }

 private:
  fs::path folder_;
};

std::string entry(const std::string& rest, const std::string& file = "good.ecsv") {
  return fmt::format("[[passband]]\nid = \"polaris-g\"\nfile = \"{}\"\nresponse = \"photon\"\n{}\n", file, rest);
}

/// Magnitude 5 on the AB scale, but for straight lines between the points.
Spectrum star_of_ab_five() {
  Spectrum star;
  for (double x = 3500; x <= 6500; x += 1) {
    star.wavelength.push_back(x);
    star.flux.push_back(36.31 * constants::jansky_cgs * constants::speed_of_light_angstrom_s / (x * x));
  }
  return star;
}

}  // namespace

TEST_CASE("magnitudes and fluxes of the three systems", "[light]") {
  const CatalogueFolder folder;
  const Spectrum star = star_of_ab_five();

  SECTION("AB") {
    const auto catalogue =
        folder.read(entry("system = \"AB\"\nab_offset = 0.02\nzero_point_error = 0.01\nwavelength_error = 7\n"
                          "source = \"an invented survey\""));
    const CalibratedPassband& band = catalogue.at("polaris-g");
    CHECK(band.system == MagnitudeSystem::ab);
    CHECK(band.ab_magnitude_of_zero == 0);
    CHECK(band.zero_point_error == 0.01);
    CHECK(band.wavelength_error == 7);
    CHECK(band.source == "an invented survey");
    CHECK(band.flux_of_magnitude(20) == Approx(3631e6 * std::pow(10, -0.4 * 20.02)));
    CHECK(band.flux_of_flux(100) == Approx(100 * std::pow(10, -0.4 * 0.02)));
    CHECK(band.flux_of_flux(-3) < 0);
    CHECK(band.magnitude_of_flux(band.flux_of_magnitude(17.3)) == Approx(17.3));
  }
  SECTION("standard star: its magnitude is 0 after the offset is added") {
    const auto catalogue = folder.read(entry("system = \"vega\"\nab_offset = -0.03"), star);
    const CalibratedPassband& band = catalogue.at("polaris-g");
    CHECK(band.system == MagnitudeSystem::standard);
    CHECK(band.ab_magnitude_of_zero == Approx(5).margin(1e-6));
    CHECK(band.magnitude_of_flux(36.31e6) == Approx(0.03).margin(1e-6));
    CHECK(band.flux_of_magnitude(0.03) == Approx(36.31e6).epsilon(1e-6));
  }
  SECTION("synthetic zero point") {
    const auto catalogue = folder.read(entry("system = \"synthetic\"\nzero_point = 14.5"));
    const CalibratedPassband& band = catalogue.at("polaris-g");
    CHECK(band.system == MagnitudeSystem::synthetic);
    const double stated = 14.5 - 2.5 * std::log10(band.passband.photon_rate(star));
    CHECK(band.magnitude_of_flux(36.31e6) == Approx(stated).margin(1e-6));
  }
}

TEST_CASE("an unknown passband is answered with the nearest known one", "[light][badinput]") {
  const CatalogueFolder folder;
  const auto catalogue = folder.read(entry("system = \"AB\""));
  CHECK(catalogue.has("polaris-g"));
  CHECK(catalogue.ids() == std::vector<std::string>{"polaris-g"});
  CHECK_THROWS_WITH(catalogue.at("polarisg", {"lightcurves.ecsv", 12, "passband"}),
                    Contains("lightcurves.ecsv, row 12, column passband") &&
                        Contains("unknown passband \"polarisg\"") && Contains("did you mean \"polaris-g\""));
  CHECK_THROWS_AS(PassbandCatalogue().at("anything"), InputError);
}

TEST_CASE("bad catalogues are refused with file, line and key", "[light][badinput]") {
  const CatalogueFolder folder;
  const auto refused = [&](const std::string& toml, const std::string& part, const std::string& other = "") {
    CAPTURE(toml);
    CHECK_THROWS_WITH(folder.read(toml), Contains("catalogue.toml") && Contains(part) && Contains(other));
    CHECK_THROWS_AS(folder.read(toml), InputError);
  };
  refused(entry("system = \"ABB\""), "row 5, column system", "did you mean \"AB\"");
  refused(entry("system = \"AB\"\nzero_pont_error = 0.1"), "row 6, column zero_pont_error",
          "did you mean \"zero_point_error\"");
  refused(entry("system = \"AB\"", "absent.ecsv"), "absent.ecsv", "does not exist");
  refused(entry("system = \"synthetic\""), "no zero_point");
  refused(entry("system = \"AB\"\nzero_point = 14"), "has no meaning");
  refused(entry("system = \"vega\""), "needs the spectrum of the standard star");
  refused(entry("system = \"AB\"\nzero_point_error = -0.1"), "negative zero_point_error");
  refused(entry("system = \"AB\"\nab_offset = \"x\""), "column ab_offset", "not a finite number");
  refused(entry("system = \"AB\"\nab_offset = nan"), "column ab_offset", "not a finite number");
  refused(entry(""), "has no system");
  refused("[[passband]]\nfile = \"good.ecsv\"\n", "has no id");
  refused(entry("system = \"AB\"") + entry("system = \"AB\""), "given twice");
  refused("title = 1\n" + entry("system = \"AB\""), "unknown key \"title\"");
  refused("", "no [[passband]] entry");
  refused("[[passband\n", "row 1");
  refused("[[passband]]\nid = \"a\"\nfile = \"good.ecsv\"\nresponse = \"energy\"\nsystem = \"AB\"\n", "says of itself");

  const auto curve_refused = [&](const std::string& rows, const std::string& part) {
    folder.write("bad.ecsv", CatalogueFolder::curve(rows));
    CHECK_THROWS_WITH(folder.read(entry("system = \"AB\"", "bad.ecsv")), Contains("bad.ecsv") && Contains(part));
  };
  curve_refused("4000,0\n5000,1\n5000,1\n6000,0\n", "row 3, column wavelength");
  curve_refused("4000,0\n5000,-1\n6000,0\n", "row 2, column throughput");
  curve_refused("4000,0\n5000,\n6000,0\n", "row 2, column throughput");

  const Spectrum short_star{{4500, 5500}, {1, 1}};
  CHECK_THROWS_WITH(folder.read(entry("system = \"vega\""), short_star),
                    Contains("beyond the spectrum of the standard star"));
  CHECK_THROWS_AS(PassbandCatalogue::read("no-such-folder/catalogue.toml", std::nullopt), InputError);
}
