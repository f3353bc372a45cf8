#include <catch2/catch.hpp>
#include <cmath>

#include "sky/infall.h"

using namespace thirdrung;

namespace {
constexpr double c = 299792.458;
}

// Source: M87 stands at (l, b) = (283.78°, 74.49°) (e.g. Willick et al. 1997, ApJ 486, 629, on the centre of Virgo).
// Table A1 of Mould et al. 2000 gives the centre to a tenth of a degree.
TEST_CASE("Virgo is where it is", "[published]") {
  const Attractor virgo = published_attractors().at(0);
  CHECK(separation(virgo.centre.l, virgo.centre.b, 283.78, 74.49) < 0.1);
}

// Source: Mould et al. 2000, Table A1, prints the velocity of each attractor in both frames: 1035 and 957 (Virgo), 4600
// and 4380 (Great Attractor), 13800 and 13600 km/s (Shapley). Their differences are those of the older 300 sin l cos b
// (de Vaucouleurs, de Vaucouleurs & Corwin 1976), not of the correction the paper gives for galaxies, and so check our
// centres. Tolerance: the digits printed.
TEST_CASE("the centres give the two velocities of the published table", "[published]") {
  const auto older = [](const Attractor& a) { return 300.0 * unit_vector(a.centre.l, a.centre.b)[1]; };
  const auto all = published_attractors();
  CHECK(older(all.at(0)) == Approx(957.0 - 1035.0).margin(1.0));
  CHECK(older(all.at(1)) == Approx(4380.0 - 4600.0).margin(10.0));
  CHECK(older(all.at(2)) == Approx(13600.0 - 13800.0).margin(100.0));
}

// Source: Yahil, Tammann & Sandage 1977: 308 km/s towards (l, b) = (105°, −7°). Tolerance: the digits printed, half a
// degree on 308 km/s.
TEST_CASE("the Sun's motion in the Local Group has its published size and direction", "[published]") {
  CHECK(local_group_correction({105.0, -7.0}) == Approx(308.0).margin(1.0));
  CHECK(local_group_correction({285.0, 7.0}) == Approx(-308.0).margin(1.0));
  CHECK(local_group_correction({195.0, 0.0}) == Approx(0.0).margin(3.0));
}

TEST_CASE("infall has the published signs and limits") {
  const Attractor great = published_attractors().at(1);
  const double v_fid = great.infall_at_us;
  const Galactic away{great.centre.l + 180.0, -great.centre.b};
  CHECK(our_infall(great, great.centre) == Approx(v_fid));
  CHECK(our_infall(great, away) == Approx(-v_fid));
  // A galaxy here falls as we do, and the two terms cancel: its velocity needs no correction.
  CHECK(our_infall(great, great.centre) + galaxy_infall(great, 0.0, great.centre) == Approx(0.0).margin(1e-9));
  // Behind the attractor a galaxy falls towards us, before it away from us, as V_fid (r/V_a)^(1−γ) with γ = 2.
  CHECK(galaxy_infall(great, 2.0 * great.velocity, great.centre) == Approx(v_fid).epsilon(1e-12));
  CHECK(galaxy_infall(great, 0.5 * great.velocity, great.centre) == Approx(-2.0 * v_fid).epsilon(1e-12));
  // Very far off it does not fall at all.
  CHECK(galaxy_infall(great, 1e9, great.centre) == Approx(0.0).margin(0.01));
}

TEST_CASE("the fall is finite and continuous in an attractor's region") {
  const Attractor virgo = published_attractors().at(0);
  const double edge = virgo.velocity * (1.0 + std::sin(virgo.radius * M_PI / 180.0));
  const double inside = galaxy_infall(virgo, edge - 1e-6, virgo.centre);
  const double outside = galaxy_infall(virgo, edge + 1e-6, virgo.centre);
  CHECK(inside == Approx(outside).margin(1e-4));
  CHECK(galaxy_infall(virgo, virgo.velocity, virgo.centre) == Approx(0.0).margin(1e-9));
}

TEST_CASE("in the CMB frame the model fades with distance") {
  const Galactic where{150.0, 40.0};
  CHECK(std::abs(infall_flow(0.5, where).v_pec) < 25.0);
  CHECK(infall_flow(0.5, where).v_pec < 0.0);  // it falls back towards the attractors, and so towards us
  const Attractor great = published_attractors().at(1);
  CHECK(infall_flow(2500.0 / c, great.centre).v_pec > 200.0);   // before it: away from us
  CHECK(infall_flow(7500.0 / c, great.centre).v_pec < -200.0);  // behind it: towards us
  InfallOptions weak;
  weak.strength = 0.5;
  CHECK(infall_flow(7500.0 / c, great.centre, {}, weak).v_pec ==
        Approx(0.5 * infall_flow(7500.0 / c, great.centre).v_pec).epsilon(1e-12));
}

TEST_CASE("both schemes are consistent with the CMB redshift") {
  const SunMotion sun;
  const Galactic where{150.0, 40.0};
  for (const InfallScheme scheme : {InfallScheme::cmb_frame, InfallScheme::as_published}) {
    InfallOptions options;
    options.scheme = scheme;
    const InfallResult flow = infall_flow(0.02, where, sun, options);
    const double z_cmb = (1.0 + flow.z_flow) * (1.0 + flow.v_pec / c) - 1.0;
    CHECK(z_cmb == Approx(z_cmb_from_helio(0.02, where, sun)).epsilon(1e-12));
  }
}

TEST_CASE("as published, the flow velocity is the published sum") {
  InfallOptions options;
  options.scheme = InfallScheme::as_published;
  const Galactic where{150.0, 40.0};
  const double v_helio = 3000.0;
  const double v_lg = v_helio + local_group_correction(where);
  double sum = v_lg;
  for (const Attractor& a : options.attractors) sum += our_infall(a, where) + galaxy_infall(a, v_lg, where);
  const double v_flow = c * infall_flow(v_helio / c, where, {}, options).z_flow;
  CHECK(v_flow == Approx(sum).margin(0.011 * std::abs(sum - v_helio)));  // z ΔV
}

TEST_CASE("as published, a member of Virgo is put at its centre") {
  InfallOptions options;
  options.scheme = InfallScheme::as_published;
  const Attractor virgo = options.attractors.at(0);
  const Galactic beside{virgo.centre.l + 5.0, virgo.centre.b - 2.0};
  const InfallResult one = infall_flow(800.0 / c, beside, {}, options);
  const InfallResult other = infall_flow(1900.0 / c, virgo.centre, {}, options);
  CHECK(one.inside == "Virgo");
  CHECK(one.z_flow == other.z_flow);
  double expected = 957.0;
  for (const Attractor& a : options.attractors) {
    expected += our_infall(a, virgo.centre) + galaxy_infall(a, 957.0, virgo.centre);
  }
  CHECK(c * one.z_flow == Approx(expected).margin(3.0));
  CHECK(infall_flow(800.0 / c, {virgo.centre.l, virgo.centre.b - 15.0}).inside.empty());
}
