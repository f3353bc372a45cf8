#include <catch2/catch.hpp>
#include <cmath>

#include "lightcurve/fit.h"
#include "lightcurve/synthetic_template.h"
#include "real_data.h"
#include "sample/read_supernovae.h"
#include "tables/read_write.h"

using namespace thirdrung;

namespace {

const std::vector<std::string> samples = {"cfa1", "cfa2",       "cfa3", "cfa4", "csp",
                                          "des3", "foundation", "loss", "lowz", "ps1md"};

}  // namespace

// The template is an invented one: what is checked is that nothing real breaks the reading or the fit, not its answer.
TEST_CASE("every published sample is read and fitted without a fault", "[realdata]") {
  THIRDRUNG_NEEDS_REAL_DATA(data);
  const Spectrum vega = read_spectrum(read_table(data / "standards" / "vega.ecsv"));
  const PassbandCatalogue catalogue = PassbandCatalogue::read(data / "passbands" / "catalogue.toml", vega);
  const PreparedTemplate prepared(testing::synthetic_template());
  for (const std::string& sample : samples) {
    INFO(sample);
    const Photometry photometry = read_photometry(data / "lightcurves" / (sample + ".ecsv"), catalogue, sample);
    CHECK(photometry.set_aside.empty());
    const auto supernovae = read_supernovae(read_table(data / "supernovae" / (sample + ".ecsv")), sample).supernovae;
    const auto fits = fit_all(photometry.light_curves, supernovae, prepared, catalogue, Extinction());
    CHECK(fits.fits.size() + fits.set_aside.size() == photometry.light_curves.size());
    CHECK(10 * fits.fits.size() > 9 * photometry.light_curves.size());
    for (const LightCurveFit& fit : fits.fits) {
      INFO(fit.supernova);
      CHECK(std::isfinite(fit.m_b));
      CHECK(std::isfinite(fit.chi2));
      CHECK(fit.covariance.allFinite());
    }
  }
}
