#include <catch2/catch.hpp>
#include <cmath>
#include <stdexcept>

#include "../sky/small_fits.h"
#include "sample/sky_reddening.h"

using namespace thirdrung;

namespace {

Supernova at(const std::string& name, double l, double b, double ebv) {
  Supernova s;
  s.name = name;
  const Equatorial where = icrs_from_galactic(l, b);
  s.ra = where.ra;
  s.dec = where.dec;
  s.mw_ebv = ebv;
  return s;
}

}  // namespace

TEST_CASE("reddening comes from the table, the map, or the map where the table has none") {
  const testing::ScratchFolder folder("thirdrung-sky-reddening");
  const std::vector<testing::Card> north = {
      {"LAM_NSGP", "1"}, {"LAM_SCAL", "2.0"}, {"CRPIX1", "2.5"}, {"CRPIX2", "2.5"}};
  auto south = north;
  south[0].second = "-1";
  testing::write_small_fits(folder / "n.fits", {4, 4}, std::vector<float>(16, 0.03F), north);
  testing::write_small_fits(folder / "s.fits", {4, 4}, std::vector<float>(16, NAN), south);
  const DustMap map = DustMap::lambert(folder / "n.fits", folder / "s.fits");
  const std::vector<Supernova> all = {at("a", 10.0, 50.0, 0.1), at("b", 10.0, 50.0, missing_value),
                                      at("c", 10.0, -50.0, missing_value), at("d", 10.0, -50.0, 0.2)};

  std::vector<Supernova> list = all;
  SkyReddeningResult result = apply_sky_reddening(list, ReddeningSource::table_then_map, &map);
  REQUIRE(list.size() == 3);
  CHECK(list[0].mw_ebv == 0.1);
  CHECK(list[1].mw_ebv == Approx(0.03));
  CHECK(list[2].mw_ebv == 0.2);
  CHECK(result.from_map == 1);
  REQUIRE(result.set_aside.size() == 1);
  CHECK(result.set_aside[0].supernova == "c");

  list = all;
  result = apply_sky_reddening(list, ReddeningSource::map, &map);
  CHECK(list.size() == 2);
  CHECK(list[0].mw_ebv == Approx(0.03));

  list = all;
  result = apply_sky_reddening(list, ReddeningSource::table, nullptr);
  CHECK(list.size() == 2);
  CHECK_THAT(result.set_aside.at(0).reason, Catch::Contains("no dust map"));
  CHECK_THROWS_AS(apply_sky_reddening(list, ReddeningSource::map, nullptr), std::logic_error);
}
