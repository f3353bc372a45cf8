#include <catch2/catch.hpp>
#include <cmath>

#include "base/error.h"
#include "sky/dust_map.h"
#include "small_fits.h"

using namespace thirdrung;
using testing::Card;

namespace {

std::vector<Card> header(const std::string& pole) {
  return {{"BUNIT", "'mag     '"}, {"LAM_NSGP", pole}, {"LAM_SCAL", "2.0"}, {"CRPIX1", "2.5"},
          {"CRPIX2", "2.5"},       {"CRVAL1", "0.0"},  {"CRVAL2", "0.0"},   {"CTYPE1", "'LAMBERT--X'"}};
}

std::vector<float> constant(float value) {
  return std::vector<float>(16, value);
}

Equatorial icrs(double l, double b) {
  return icrs_from_galactic(l, b);
}

double at(const DustMap& map, double l, double b) {
  const Equatorial where = icrs(l, b);
  return map.ebv(where.ra, where.dec).value();
}

}  // namespace

TEST_CASE("each hemisphere is read from its own image, and the factor is explicit") {
  const testing::ScratchFolder folder("thirdrung-dust-hemispheres");
  testing::write_small_fits(folder / "n.fits", {4, 4}, constant(0.02F), header("1"));
  testing::write_small_fits(folder / "s.fits", {4, 4}, constant(0.05F), header("-1"));
  const DustMap plain = DustMap::lambert(folder / "n.fits", folder / "s.fits");
  CHECK(at(plain, 10.0, 40.0) == Approx(0.02));
  CHECK(at(plain, 10.0, -40.0) == Approx(0.05));
  DustMapOptions options;
  options.recalibration = 0.86;
  const DustMap scaled = DustMap::lambert(folder / "n.fits", folder / "s.fits", options);
  CHECK(at(scaled, 10.0, 40.0) == Approx(0.86 * 0.02));
  CHECK(scaled.description().find("0.86") != std::string::npos);
}

TEST_CASE("pixels of a polar image stand where the published equations put them") {
  const testing::ScratchFolder folder("thirdrung-dust-pixels");
  // Schlegel, Finkbeiner & Davis 1998, appendix C: x = S ρ cos l + x0, y = −n S ρ sin l + y0, ρ² = 1 − n sin b. The
  // pixel (x, y) = (2, 1) is at offsets (+½, −½) from the pole: ρ = sqrt(½)/2; north l = 45°, south l = 315°.
  std::vector<float> pixels = constant(0.0F);
  pixels[2 + 4 * 1] = 1.0F;
  testing::write_small_fits(folder / "n.fits", {4, 4}, pixels, header("1"));
  testing::write_small_fits(folder / "s.fits", {4, 4}, pixels, header("-1"));
  const DustMap map = DustMap::lambert(folder / "n.fits", folder / "s.fits");
  const double b = std::asin(1.0 - 0.125) * 180.0 / M_PI;
  CHECK(at(map, 45.0, b) == Approx(1.0).margin(1e-9));
  CHECK(at(map, 315.0, -b) == Approx(1.0).margin(1e-9));
  CHECK(at(map, 0.0, 90.0) == Approx(0.25).margin(1e-6));  // the pole is the corner of four pixels
}

TEST_CASE("a pixel without a value has no reddening") {
  const testing::ScratchFolder folder("thirdrung-dust-blank");
  testing::write_small_fits(folder / "n.fits", {4, 4}, constant(NAN), header("1"));
  testing::write_small_fits(folder / "s.fits", {4, 4}, constant(0.05F), header("-1"));
  const DustMap map = DustMap::lambert(folder / "n.fits", folder / "s.fits");
  const Equatorial where = icrs(10.0, 40.0);
  CHECK_FALSE(map.ebv(where.ra, where.dec).has_value());
}

TEST_CASE("bad dust maps are refused with their fault") {
  const testing::ScratchFolder folder("thirdrung-dust-bad");
  const auto n = folder / "n.fits";
  const auto s = folder / "s.fits";
  testing::write_small_fits(n, {4, 4}, constant(0.02F), header("1"));
  testing::write_small_fits(s, {4, 4}, constant(0.05F), header("-1"));
  CHECK_THROWS_WITH(DustMap::lambert(s, n), Catch::Contains("LAM_NSGP"));
  CHECK_THROWS_WITH(DustMap::lambert(n, folder / "absent.fits"), Catch::Contains("does not exist"));
  CHECK_THROWS_WITH(DustMap::healpix(n), Catch::Contains("no binary table"));
  DustMapOptions options;
  options.recalibration = 0.0;
  CHECK_THROWS_AS(DustMap::lambert(n, s, options), InputError);
  auto cards = header("1");
  cards[0].second = "'MJy/sr  '";
  testing::write_small_fits(n, {4, 4}, constant(0.02F), cards);
  CHECK_THROWS_WITH(DustMap::lambert(n, s), Catch::Contains("MJy/sr"));
  std::filesystem::resize_file(n, 100);
  CHECK_THROWS_AS(DustMap::lambert(n, s), InputError);
}
