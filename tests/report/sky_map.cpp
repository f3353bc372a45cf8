#include "report/sky_map.h"

#include <catch2/catch.hpp>
#include <cmath>

using namespace thirdrung;

// Calabretta & Greisen 2002, A&A 395, 1077, eqs. 108-109 in radians: the poles at (0, ±√2), the middle of the edge at
// ∓2√2.
TEST_CASE("poles, middle and edges of the map", "[report]") {
  CHECK(on_sky_map(180, 0).x == Approx(0).margin(1e-12));
  CHECK(on_sky_map(123, 90).y == Approx(std::sqrt(2.0)).epsilon(1e-12));
  CHECK(on_sky_map(123, -90).y == Approx(-std::sqrt(2.0)).epsilon(1e-12));
  CHECK(on_sky_map(360 - 1e-9, 0).x == Approx(-2 * std::sqrt(2.0)).epsilon(1e-9));
  CHECK(on_sky_map(1e-9, 0).x == Approx(2 * std::sqrt(2.0)).epsilon(1e-9));
  // East to the left: right ascension grows leftwards.
  CHECK(on_sky_map(200, 10).x < on_sky_map(190, 10).x);
}

// An equal-area map keeps area: the Jacobian d(x,y)/d(ra,dec) is cos(dec) everywhere. Tolerance: central differences of
// 1e-4 rad.
TEST_CASE("the map keeps areas", "[report]") {
  const double step = 1e-4 * 180 / 3.14159265358979;
  for (const double dec : {-70.0, -20.0, 0.0, 35.0, 80.0}) {
    for (const double ra : {20.0, 100.0, 181.0, 300.0}) {
      const MapPoint e = on_sky_map(ra + step, dec), w = on_sky_map(ra - step, dec), n = on_sky_map(ra, dec + step),
                     s = on_sky_map(ra, dec - step);
      const double area = ((e.x - w.x) * (n.y - s.y) - (e.y - w.y) * (n.x - s.x)) / 4e-8;
      CHECK(std::abs(area) == Approx(std::cos(dec * 3.14159265358979 / 180)).epsilon(1e-6));
    }
  }
}

// The galactic centre (Sgr A*, ra 266.41684°, dec -29.00781°, Reid & Brunthaler 2004) lies 0.05° off the plane; points
// come every 2°.
TEST_CASE("the plane of the Galaxy passes its centre", "[report]") {
  const MapPoint centre = on_sky_map(266.41684, -29.00781);
  double nearest = 1e9;
  for (const MapLine& line : sky_map_lines()) {
    if (line.kind != 2) continue;
    for (const MapPoint& point : line.points)
      nearest = std::min(nearest, std::hypot(point.x - centre.x, point.y - centre.y));
  }
  CHECK(nearest < 0.002);
}
