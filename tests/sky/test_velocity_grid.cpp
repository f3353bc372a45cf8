#include <catch2/catch.hpp>
#include <cmath>
#include <functional>

#include "base/error.h"
#include "sky/velocity_grid.h"
#include "small_fits.h"

using namespace thirdrung;

namespace {

constexpr double c = 299792.458;

VelocityCube radial_cube(int half, double step, const std::function<double(double)>& velocity_at) {
  VelocityCube cube;
  const std::size_t n = 2 * static_cast<std::size_t>(half) + 1;
  cube.size = {n, n, n};
  cube.first = {-half * step, -half * step, -half * step};
  cube.step = {step, step, step};
  cube.radial = true;
  for (int z = -half; z <= half; ++z) {
    for (int y = -half; y <= half; ++y) {
      for (int x = -half; x <= half; ++x) {
        cube.velocities.push_back(static_cast<float>(velocity_at(step * std::sqrt(x * x + y * y + z * z))));
      }
    }
  }
  return cube;
}

}  // namespace

TEST_CASE("a constant flow is projected on the line of sight") {
  VelocityCube cube = radial_cube(2, 50.0, [](double) { return 0.0; });
  cube.radial = false;
  const std::size_t voxels = cube.velocities.size();
  cube.velocities.assign(3 * voxels, 0.0F);
  for (std::size_t i = 0; i < voxels; ++i) cube.velocities[2 * voxels + i] = 300.0F;  // towards the north Galactic pole
  const VelocityGrid grid(cube);
  CHECK(grid.radial_velocity({0.0, 90.0}, 40.0).value() == Approx(300.0));
  CHECK(grid.radial_velocity({77.0, -30.0}, 40.0).value() == Approx(-150.0));
  CHECK_FALSE(grid.radial_velocity({0.0, 0.0}, 101.0));
  CHECK(grid.depth() == Approx(100.0));
  const GridFlow flow = grid.flow(0.02, {0.0, 90.0});
  CHECK(flow.inside);
  CHECK(flow.v_pec == Approx(300.0));
  CHECK((1.0 + flow.z_flow) * (1.0 + flow.v_pec / c) == Approx(1.02).epsilon(1e-12));
}

TEST_CASE("beta, a factor and the external flow do what they say") {
  VelocityCube cube = radial_cube(2, 50.0, [](double) { return 200.0; });
  cube.beta = 0.4;
  cube.external = {0.0, 0.0, 100.0};
  const Galactic pole{0.0, 90.0};
  CHECK(VelocityGrid(cube).radial_velocity(pole, 10.0).value() == Approx(300.0));
  VelocityGridOptions options;
  options.beta = 0.5;
  CHECK(VelocityGrid(cube, options).radial_velocity(pole, 10.0).value() == Approx(350.0));
  options.scale = 2.0;
  options.external = {0.0, 0.0, -40.0};
  CHECK(VelocityGrid(cube, options).radial_velocity(pole, 10.0).value() == Approx(460.0));
  cube.beta.reset();
  CHECK_THROWS_AS(VelocityGrid(cube, options), InputError);
}

TEST_CASE("a supernova outside the grid is said to be so") {
  VelocityCube cube = radial_cube(2, 10.0, [](double) { return 200.0; });
  cube.external = {0.0, 0.0, 100.0};
  VelocityGridOptions options;
  GridFlow flow = VelocityGrid(cube, options).flow(0.05, {0.0, 90.0});
  CHECK_FALSE(flow.inside);
  CHECK(flow.v_pec == 0.0);
  CHECK(flow.z_flow == Approx(0.05));
  options.outside = VelocityGridOptions::Outside::external_flow;
  flow = VelocityGrid(cube, options).flow(0.05, {0.0, 90.0});
  CHECK_FALSE(flow.inside);
  CHECK(flow.v_pec == Approx(100.0));
}

TEST_CASE("of several distances that fit, the middle one is taken") {
  // Steep infall on a shell at 60 Mpc/h: +900 km/s before it, −900 behind it, so that three distances have its
  // redshift.
  const auto infall = [](double d) {
    return -900.0 * std::tanh((d - 60.0) / 3.0) * std::exp(-std::pow((d - 60.0) / 15.0, 2));
  };
  VelocityCube cube = radial_cube(50, 2.0, infall);
  VelocityGridOptions options;
  options.expansion = Expansion::flat_lcdm(0.0);  // distance = 2997.92458 z
  const GridFlow flow = VelocityGrid(cube, options).flow(60.0 / 2997.92458, {0.0, 0.0});
  CHECK(flow.distances == 3);
  CHECK(flow.z_flow * 2997.92458 == Approx(60.0).margin(0.1));
  cube.space = VelocityCube::Space::redshift;
  CHECK(VelocityGrid(cube, options).flow(50.0 / 2997.92458, {0.0, 0.0}).v_pec == Approx(infall(50.0)).margin(1e-3));
}

TEST_CASE("voxels without a value count as outside") {
  VelocityCube cube = radial_cube(2, 50.0, [](double) { return 200.0; });
  for (float& v : cube.velocities) v = NAN;
  CHECK_FALSE(VelocityGrid(cube).flow(0.01, {10.0, 10.0}).inside);
}

TEST_CASE("a bad velocity file is refused with its fault") {
  const testing::ScratchFolder folder("thirdrung-velocity-files");
  const std::vector<testing::Card> good = {{"BUNIT", "'km/s    '"},  {"VFRAME", "'CMB     '"}, {"VAXES", "'GALACTIC'"},
                                           {"CUNIT1", "'Mpc/h   '"}, {"CUNIT2", "'Mpc/h   '"}, {"CUNIT3", "'Mpc/h   '"},
                                           {"CRPIX1", "1.0"},        {"CRPIX2", "1.0"},        {"CRPIX3", "1.0"},
                                           {"CRVAL1", "-50.0"},      {"CRVAL2", "-50.0"},      {"CRVAL3", "-50.0"},
                                           {"CDELT1", "50.0"},       {"CDELT2", "50.0"},       {"CDELT3", "50.0"}};
  const std::vector<float> zeros(27, 0.0F);
  const auto with = [&](const std::string& keyword, const std::string& value) {
    std::vector<testing::Card> cards = good;
    for (auto& card : cards) {
      if (card.first == keyword) card.second = value;
    }
    return cards;
  };
  const auto path = folder / "field.fits";
  testing::write_small_fits(path, {3, 3, 3}, zeros, good);
  CHECK(VelocityGrid::read(path).depth() == Approx(50.0));

  testing::write_small_fits(path, {3, 3, 3}, zeros, with("BUNIT", "'m/s     '"));
  CHECK_THROWS_WITH(VelocityGrid::read(path), Catch::Contains("BUNIT") && Catch::Contains("'m/s'"));
  testing::write_small_fits(path, {3, 3, 3}, zeros, with("CUNIT2", "'Mpc     '"));
  CHECK_THROWS_WITH(VelocityGrid::read(path), Catch::Contains("CUNIT2"));
  testing::write_small_fits(path, {3, 3, 3}, zeros, with("CDELT3", "0.0"));
  CHECK_THROWS_AS(VelocityGrid::read(path), InputError);
  auto lacking = good;
  lacking.pop_back();
  testing::write_small_fits(path, {3, 3, 3}, zeros, lacking);
  CHECK_THROWS_WITH(VelocityGrid::read(path), Catch::Contains("CDELT3") && Catch::Contains("missing"));
  testing::write_small_fits(path, {3, 9}, zeros, good);
  CHECK_THROWS_AS(VelocityGrid::read(path), InputError);
  testing::write_small_fits(path, {40, 40, 40}, std::vector<float>(64000, 0.0F), good);
  std::filesystem::resize_file(path, 100000);
  CHECK_THROWS_WITH(VelocityGrid::read(path), Catch::Contains("field.fits"));
  CHECK_THROWS_WITH(VelocityGrid::read(folder / "absent.fits"), Catch::Contains("does not exist"));
}
