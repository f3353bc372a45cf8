#include <catch2/catch.hpp>
#include <cmath>

#include "sky/sun_motion.h"

using namespace thirdrung;

TEST_CASE("towards the apex the Sun's motion takes its whole speed off") {
  const SunMotion sun;
  const double beta = 369.82 / 299792.458;
  CHECK(z_sun(sun, {sun.l, sun.b}) == Approx(std::sqrt((1 - beta) / (1 + beta)) - 1).epsilon(1e-12));
  CHECK(z_sun(sun, {sun.l - 180.0, -sun.b}) == Approx(std::sqrt((1 + beta) / (1 - beta)) - 1).epsilon(1e-12));
  CHECK(std::abs(z_sun(sun, {sun.l - 90.0, 0.0})) < 1e-15);
  CHECK(z_cmb_from_helio(0.03, {sun.l, sun.b}) > 0.03);
}

TEST_CASE("redshift frames invert") {
  const Galactic where{123.0, -45.0};
  const SunMotion sun{371.0, 264.3, 48.1};
  CHECK(z_helio_from_cmb(z_cmb_from_helio(0.0512, where, sun), where, sun) == Approx(0.0512).epsilon(1e-13));
  const double z_flow = z_flow_from_cmb(0.04, -350.0);
  CHECK(z_flow > 0.04);  // a supernova that comes towards us lies farther out than its redshift says
  CHECK(peculiar_velocity(0.04, z_flow) == Approx(-350.0).epsilon(1e-11));
}
