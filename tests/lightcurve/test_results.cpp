#include <catch2/catch.hpp>
#include <cmath>
#include <filesystem>

#include "lightcurve/results.h"
#include "lightcurve/synthetic_survey.h"
#include "tables/read_write.h"

using namespace thirdrung;
using namespace thirdrung::testing;

namespace {

struct Fitted {
  std::vector<LightCurve> light_curves;
  std::vector<LightCurveFit> fits;
};

Fitted two_fits() {
  const SpectralTemplate model = synthetic_template();
  const PreparedTemplate prepared(model);
  const PassbandCatalogue catalogue = invented_catalogue();
  const Truth truth{58000, 16.5, 1.0, 0.05, 0.09, 0.05};
  Fitted out;
  FitOptions options;
  options.curves = true;
  for (int i = 0; i < 2; ++i) {
    out.light_curves.push_back(observe(truth, model, catalogue, {"violet", "blue", "red"}, -5 + 12 * i, 30, 5, 0.01));
    out.light_curves.back().supernova = "invented-" + std::to_string(i);
    out.fits.push_back(
        fit_light_curve(out.light_curves.back(), supernova_of(truth), prepared, catalogue, Extinction(), options));
  }
  return out;
}

}  // namespace

TEST_CASE("fits come back from their table as they went in") {
  const Fitted fitted = two_fits();
  const auto path = std::filesystem::temp_directory_path() / "thirdrung-test-lightcurve-fits.ecsv";
  write_table(fits_table(fitted.fits), path);
  const auto back = read_fits(read_table(path));
  std::filesystem::remove(path);
  REQUIRE(back.size() == 2);
  for (std::size_t i = 0; i < 2; ++i) {
    const LightCurveFit& in = fitted.fits[i];
    const LightCurveFit& out = back[i].fit;
    CHECK(out.supernova == in.supernova);
    CHECK(out.t_0 == in.t_0);
    CHECK(out.m_b == in.m_b);
    CHECK(out.s == in.s);
    CHECK(out.c == in.c);
    CHECK((out.covariance - in.covariance).cwiseAbs().maxCoeff() < 1e-15 * in.covariance.cwiseAbs().maxCoeff() + 1e-18);
    CHECK(out.chi2 == in.chi2);
    CHECK(out.dof == in.dof);
    CHECK(out.dm15_b == in.dm15_b);
    CHECK(out.bands_used == in.bands_used);
    REQUIRE(out.bands_left_out.size() == 1);
    CHECK(out.bands_left_out[0].reason == in.bands_left_out[0].reason);
    CHECK(back[i].trusted == in.trusted());
    CHECK(back[i].remarks == text_of(in.remarks));
  }
  CHECK(back[0].trusted);
  CHECK_FALSE(back[1].trusted);
}

TEST_CASE("points and curves name their supernova and band") {
  const Fitted fitted = two_fits();
  const Table points = points_table(fitted.fits, fitted.light_curves);
  CHECK(points.rows() == fitted.fits[0].epochs.size() + fitted.fits[1].epochs.size());
  CHECK(points.strings("passband")[0] == "blue");
  CHECK(points.reals_in("model_flux", "Jy")[0] == Approx(fitted.fits[0].epochs[0].model_flux * 1e-6));
  const Table curves = curves_table(fitted.fits, fitted.light_curves);
  // Two supernovae, two bands, every day from -15 to 45.
  CHECK(curves.rows() == std::size_t{4} * 61);
}

TEST_CASE("a broken covariance is refused") {
  Fitted fitted = two_fits();
  fitted.fits[1].covariance(0, 1) = 10;
  Table table = fits_table(fitted.fits);
  table.set_origin("fits.ecsv");
  CHECK_THROWS_WITH(read_fits(table), Catch::Contains("fits.ecsv, row 2") && Catch::Contains("positive definite"));
}
