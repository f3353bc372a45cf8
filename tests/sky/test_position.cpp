#include <catch2/catch.hpp>

#include "sky/position.h"

using namespace thirdrung;

// Source: Reid & Brunthaler 2004, ApJ 616, 872, appendix: the IAU Galactic pole is at 12h51m26.282s +27°07′42.01″
// (J2000) and the origin of Galactic coordinates at 17h45m37.224s −28°56′10.23″; from memory. Tolerance 1e-4 deg: these
// are FK5, 25 mas off the ICRS.
TEST_CASE("the Galactic pole and origin are where they are published", "[published]") {
  CHECK(galactic_from_icrs(192.859508, 27.128336).b == Approx(90.0).margin(1e-4));
  const Galactic centre = galactic_from_icrs(266.405100, -28.936175);
  CHECK(separation(centre.l, centre.b, 0.0, 0.0) < 1e-4);
}

TEST_CASE("Galactic and back is the identity") {
  for (double ra = 0.0; ra < 360.0; ra += 37.0) {
    for (double dec = -85.0; dec < 90.0; dec += 17.0) {
      const Galactic g = galactic_from_icrs(ra, dec);
      CHECK((g.l >= 0.0 && g.l < 360.0));
      const Equatorial back = icrs_from_galactic(g.l, g.b);
      CHECK(separation(back.ra, back.dec, ra, dec) < 1e-10);
    }
  }
}

// Source: M87 in B1950 (12h28m17.57s +12°40′01.7″) and J2000 (12h30m49.42s +12°23′28.0″), NASA/IPAC Extragalactic
// Database; from memory. Tolerance 1e-3 deg: the last printed digits of the B1950 position are not better.
TEST_CASE("a B1950 position is precessed to the ICRS", "[published]") {
  const Equatorial m87 = icrs_from_b1950(187.073208, 12.667139);
  CHECK(separation(m87.ra, m87.dec, 187.705917, 12.391111) < 1e-3);
}

TEST_CASE("separations are exact for tiny and opposite directions") {
  CHECK(separation(10.0, 20.0, 10.0, 20.0 + 1e-9) == Approx(1e-9).epsilon(1e-5));
  CHECK(separation(10.0, 20.0, 190.0, -20.0) == Approx(180.0));
  CHECK(separation(0.0, 89.0, 180.0, 89.0) == Approx(2.0));
}

TEST_CASE("impossible directions are told apart") {
  CHECK(is_direction(0.0, -90.0));
  CHECK(is_direction(359.999, 90.0));
  CHECK_FALSE(is_direction(-1.0, 0.0));
  CHECK_FALSE(is_direction(361.0, 0.0));
  CHECK_FALSE(is_direction(10.0, 91.0));
  CHECK_FALSE(is_direction(NAN, 0.0));
}
