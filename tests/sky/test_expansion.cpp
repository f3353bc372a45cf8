#include <catch2/catch.hpp>
#include <cmath>

#include "sky/expansion.h"

using namespace thirdrung;

// Source: astropy 5.2, FlatLambdaCDM(H0=100, Om0=0.3, Tcmb0=0).luminosity_distance(z) × 100/c; test_astropy_sky.py
// repeats the comparison on a grid. Tolerance: the digits written here.
TEST_CASE("luminosity distance agrees with astropy", "[published]") {
  const Expansion lcdm = Expansion::flat_lcdm(0.3);
  CHECK(luminosity_distance(0.01, lcdm) == Approx(0.01007722634248).epsilon(1e-11));
  CHECK(luminosity_distance(0.1, lcdm) == Approx(0.1074776722613).epsilon(1e-11));
  CHECK(luminosity_distance(1.0, lcdm) == Approx(1.542854132856).epsilon(1e-11));
}

TEST_CASE("an empty and a matter-only universe have their closed forms") {
  // Matter only (Einstein-de Sitter): H0 d_L/c = 2 (1 + z − sqrt(1 + z)).
  const Expansion matter = Expansion::flat_lcdm(1.0);
  CHECK(luminosity_distance(0.7, matter) == Approx(2.0 * (1.7 - std::sqrt(1.7))).epsilon(1e-13));
  // Cosmological constant only: H0 d_C/c = z.
  CHECK(comoving_distance(0.7, Expansion::flat_lcdm(0.0)) == Approx(0.7).epsilon(1e-13));
  CHECK(comoving_distance_mpc_h(0.7, Expansion::flat_lcdm(0.0)) == Approx(0.7 * 2997.92458).epsilon(1e-13));
}

TEST_CASE("the series agrees with flat LCDM of the same q0 and j0 up to its order") {
  for (const double omega_m : {0.2, 0.3, 0.4}) {
    const Expansion lcdm = Expansion::flat_lcdm(omega_m);
    const Expansion series = Expansion::series(lcdm.q0, lcdm.j0);
    const double at_small = luminosity_distance(0.02, series) / luminosity_distance(0.02, lcdm) - 1.0;
    const double at_large = luminosity_distance(0.04, series) / luminosity_distance(0.04, lcdm) - 1.0;
    CHECK(std::abs(at_large) < 2e-5);
    CHECK(std::abs(at_large) <= 9.0 * std::abs(at_small) + 1e-12);  // fourth order left out: relative error grows as z³
  }
}

TEST_CASE("the redshift part of the intercept is as published") {
  // Riess et al. 2016, eq. 5, written out for z = 0.1, q0 = −0.55, j0 = 1: c z[1 + ½ 1.55 z − ⅙ 1.6425 z²].
  const double bracket = 1.0 + 0.5 * 1.55 * 0.1 - (1.0 + 0.55 - 3.0 * 0.3025 + 1.0) / 6.0 * 0.01;
  CHECK(log_expansion_term(0.1) == Approx(std::log10(299792.458 * 0.1 * bracket)).epsilon(1e-14));
}

TEST_CASE("the slope of the expansion term is its derivative") {
  for (const Expansion& e : {Expansion{}, Expansion::flat_lcdm(0.3)}) {
    const double h = 1e-6;
    const double numeric = (log_expansion_term(0.05 + h, e) - log_expansion_term(0.05 - h, e)) / (2.0 * h);
    CHECK(log_expansion_slope(0.05, e) == Approx(numeric).epsilon(1e-7));
  }
}

TEST_CASE("the luminosity distance of a moving source carries the observed redshift") {
  CHECK(luminosity_distance(0.05, 0.051, Expansion{}) ==
        Approx(luminosity_distance(0.05) * 1.051 / 1.05).epsilon(1e-14));
}
