#include <fmt/format.h>

#include <catch2/catch.hpp>
#include <cmath>
#include <map>

#include "base/error.h"
#include "real_data.h"
#include "sample/read_supernovae.h"
#include "sample/redshift_frames.h"
#include "tables/read_write.h"

using namespace thirdrung;

namespace {

constexpr double c = 299792.458;

Supernova supernova() {
  Supernova s;
  s.name = "sn-a";
  s.ra = 150.0;
  s.dec = -20.0;
  s.z_helio = 0.03;
  s.z_helio_error = 1e-4;
  s.place = {"hosts.ecsv", 1, ""};
  return s;
}

RedshiftOptions with(VelocitySource source) {
  RedshiftOptions options;
  options.velocity = source;
  return options;
}

}  // namespace

TEST_CASE("without velocities the flow redshift is that of the CMB frame") {
  const Supernova s = supernova();
  const Redshifts z = redshifts_of(s, {});
  CHECK(z.z_helio_used == 0.03);
  CHECK(z.z_cmb == Approx(z_cmb_from_helio(0.03, galactic_from_icrs(s.ra, s.dec))));
  CHECK(z.z_flow == z.z_cmb);
  CHECK(z.v_pec == 0.0);
  // 250 km/s and 1e-4 in quadrature, each times (1 + z_flow) over its own (1 + z) or c.
  const double expected = (1.0 + z.z_flow) * std::hypot(1e-4 / 1.03, 250.0 / c);
  CHECK(z.z_flow_error == Approx(expected).epsilon(1e-12));
}

TEST_CASE("the redshift error is that of perturbed inputs") {
  Supernova s = supernova();
  s.v_pec = 300.0;
  RedshiftOptions options = with(VelocitySource::column);
  options.sigma_v = 0.0;
  const Redshifts z = redshifts_of(s, options);
  Supernova moved = s;
  moved.z_helio += s.z_helio_error;
  CHECK(z.z_flow_error == Approx(redshifts_of(moved, options).z_flow - z.z_flow).epsilon(1e-9));
  s.z_helio_error = 0.0;
  options.sigma_v = 250.0;
  moved = s;
  moved.v_pec += 1.0;
  CHECK(redshifts_of(s, options).z_flow_error / 250.0 ==
        Approx(z.z_flow - redshifts_of(moved, options).z_flow).epsilon(1e-5));
}

TEST_CASE("velocities of the column, scaled or absent") {
  Supernova s = supernova();
  s.v_pec = -400.0;
  RedshiftOptions options = with(VelocitySource::column);
  Redshifts z = redshifts_of(s, options);
  CHECK((1.0 + z.z_flow) * (1.0 - 400.0 / c) == Approx(1.0 + z.z_cmb).epsilon(1e-14));
  options.column_scale = 0.5;
  CHECK(redshifts_of(s, options).v_pec == -200.0);
  s.v_pec = missing_value;
  z = redshifts_of(s, options);
  CHECK(z.velocity_missing);
  CHECK(z.z_flow == z.z_cmb);
  CHECK_THAT(z.remarks, Catch::Contains("no v_pec"));
  CHECK_THROWS_WITH(redshifts_of_sample({s, s}, options), Catch::Contains("hosts.ecsv") && Catch::Contains("v_pec"));
  Supernova good = supernova();
  good.v_pec = 10.0;
  CHECK(redshifts_of_sample({s, good}, options).without_velocity == 1);
}

TEST_CASE("the group's redshift is used where given") {
  Supernova s = supernova();
  s.z_group = 0.031;
  CHECK(redshifts_of(s, {}).z_helio_used == 0.031);
  CHECK_THAT(redshifts_of(s, {}).remarks, Catch::Contains("group"));
  RedshiftOptions options;
  options.use_group = false;
  CHECK(redshifts_of(s, options).z_helio_used == 0.03);
  options.z_offset = 4e-5;
  CHECK(redshifts_of(s, options).z_helio_used == Approx(0.03004));
}

TEST_CASE("the Sun's motion can be varied") {
  RedshiftOptions options;
  options.sun.speed = 0.0;
  CHECK(redshifts_of(supernova(), options).z_cmb == Approx(0.03).epsilon(1e-14));
}

TEST_CASE("a velocity grid that covers nothing is refused") {
  VelocityCube cube;
  cube.origin = "field.fits";
  cube.size = {2, 2, 2};
  cube.first = {-1.0, -1.0, -1.0};
  cube.step = {2.0, 2.0, 2.0};
  cube.radial = true;
  cube.velocities.assign(8, 100.0F);
  RedshiftOptions options = with(VelocitySource::grid);
  options.grid = std::make_shared<VelocityGrid>(cube);
  const Redshifts z = redshifts_of(supernova(), options);
  CHECK(z.velocity_missing);
  CHECK_THAT(z.remarks, Catch::Contains("outside"));
  CHECK_THROWS_WITH(redshifts_of_sample({supernova()}, options), Catch::Contains("field.fits"));
}

TEST_CASE("a flow redshift that is not positive is set aside") {
  Supernova s = supernova();
  s.z_helio = 1e-4;
  s.v_pec = 600.0;
  const RedshiftResult result = redshifts_of_sample({s}, with(VelocitySource::column));
  REQUIRE(result.set_aside.size() == 1);
  CHECK(result.redshifts.size() == 1);
}

TEST_CASE("sources have names") {
  CHECK(velocity_source_from_name("infall", {}) == VelocitySource::infall);
  CHECK(name_of(VelocitySource::grid) == "grid");
  CHECK_THROWS_AS(velocity_source_from_name("wind", {}), InputError);
}

// Source: z_helio, z_cmb, v_pec and z_flow of Carr et al. 2022 (PASA 39, e046) and Peterson et al. 2022 (ApJ 938, 112),
// as published for the supernovae of our tables. Positions from our tables. The published columns are rounded to 1e-5,
// so each of z_helio and the results is good to 5e-6 and the sum to 1e-5, the tolerance.
TEST_CASE("published CMB-frame and flow redshifts are reproduced", "[realdata][published]") {
  THIRDRUNG_NEEDS_REAL_DATA(data);
  const Table table = read_table(data / "published" / "supernovae.ecsv");
  const auto names = table.strings("supernova");
  const auto samples = table.strings("sample");
  const auto z_helio = table.reals("z_helio");
  const auto z_cmb = table.reals("z_cmb");
  const auto v_pec = table.reals_in("v_pec", "km/s");
  const auto z_flow = table.reals("z_flow");
  std::map<std::pair<std::string, std::string>, Supernova> places;
  for (const std::string sample :
       {"cfa1", "cfa2", "cfa3", "cfa4", "csp", "des3", "foundation", "loss", "lowz", "ps1md"}) {
    for (const Supernova& s :
         read_supernovae(read_table(data / "supernovae" / (sample + ".ecsv")), sample).supernovae) {
      places[{sample, s.name}] = s;
    }
  }
  int own = 0;
  int own_agree = 0;
  int group = 0;
  int group_agree = 0;
  std::string off;
  for (std::size_t i = 0; i < names.size(); ++i) {
    const auto found = places.find({samples[i], names[i]});
    if (found == places.end()) continue;
    Supernova s = found->second;
    const bool is_own =
        std::abs(s.z_helio - z_helio[i]) < 6e-6;  // else the published redshift is the mean of the host's group
    s.z_group = z_helio[i];
    s.v_pec = v_pec[i];
    const Redshifts z = redshifts_of(s, with(VelocitySource::column));
    const bool agrees = std::abs(z.z_cmb - z_cmb[i]) < 1e-5 && std::abs(z.z_flow - z_flow[i]) < 1e-5;
    (is_own ? own : group) += 1;
    if (agrees) (is_own ? own_agree : group_agree) += 1;
    if (!agrees)
      off += fmt::format("{} {}: z_cmb {:+.2e}, z_flow {:+.2e}\n", samples[i], names[i], z.z_cmb - z_cmb[i],
                         z.z_flow - z_flow[i]);
  }
  WARN(fmt::format("own redshift: {} of {} agree to 1e-5; group redshift: {} of {}", own_agree, own, group_agree,
                   group));
  INFO(off);
  CHECK(own >= 590);
  CHECK(own_agree == own);
  CHECK(group >= 110);
  CHECK(group_agree == group);
}
