#include <catch2/catch.hpp>
#include <cmath>

#include "base/error.h"
#include "base/text.h"
#include "simulation/draw_calibrators.h"
#include "simulation/simulate.h"
#include "simulation/small_survey.h"
#include "simulation/write_simulation.h"
#include "tables/read_write.h"
#include "tables/scratch_folder.h"
#include "template/gauged_template.h"

using namespace thirdrung;
using namespace thirdrung::testing;

namespace {

SimulationOptions with_calibrators(std::uint64_t seed) {
  SimulationOptions out = small_survey(8, seed);
  out.calibrators.supernovae = 5;
  out.calibrators.shared_hosts = 1;
  out.calibrators.modulus_error = 0.05;
  out.calibrators.common_error = 0.03;
  return out;
}

}  // namespace

TEST_CASE("the first hosts have two calibrators, the others one") {
  SimulatedCalibrators calibrators;
  calibrators.supernovae = 5;
  calibrators.shared_hosts = 2;
  CHECK(hosts_of_calibrators(calibrators) == std::vector<std::size_t>{0, 0, 1, 1, 2});
  calibrators.shared_hosts = 0;
  CHECK(hosts_of_calibrators(calibrators) == std::vector<std::size_t>{0, 1, 2, 3, 4});
}

TEST_CASE("calibrators follow the relation at the true distance of their hosts") {
  const SimulationOptions options = with_calibrators(5);
  const SimulatedSample sample = simulate(options, gauged_template());
  REQUIRE(sample.calibrators.size() == 5);
  REQUIRE(sample.hosts.size() == 4);
  REQUIRE(sample.truths.size() == 13);
  const SimulatedRelation& relation = options.relation;
  for (std::size_t i = 0; i < 5; ++i) {
    const SupernovaTruth& truth = sample.truths[8 + i];
    const SimulatedHost& host = sample.hosts[sample.calibrators[i].host];
    CHECK(truth.name == sample.calibrators[i].supernova);
    CHECK(truth.z_helio == host.place.z_helio);
    CHECK(truth.z_flow > 0.004);
    CHECK(truth.z_flow < 0.01);
    const double step = truth.host_log_mass > relation.mass_step ? 0.5 : -0.5;
    const double standardised =
        truth.m_b + relation.alpha * (truth.s - 1) - relation.beta * truth.c + relation.gamma * step;
    CHECK(standardised - truth.intrinsic - host.true_modulus == Approx(relation.absolute_magnitude).margin(1e-9));
  }
  // Two of one host: one galaxy, two supernovae.
  CHECK(sample.truths[8].ra == sample.truths[9].ra);
  CHECK(sample.truths[8].s != sample.truths[9].s);
  CHECK(sample.supernovae[8].host_log_mass == Approx(sample.supernovae[9].host_log_mass).margin(1e-12).epsilon(0));
}

TEST_CASE("calibrators do not change what else is drawn") {
  SimulationOptions with = with_calibrators(5), without = with;
  without.calibrators = {};
  const SimulatedSample many = simulate(with, gauged_template()), few = simulate(without, gauged_template());
  for (std::size_t i = 0; i < few.light_curves.size(); ++i) {
    REQUIRE(many.light_curves[i].supernova == few.light_curves[i].supernova);
    CHECK(many.light_curves[i].epochs.front().flux == few.light_curves[i].epochs.front().flux);
  }
  const ScratchFolder folder;
  write_simulation(few, without, folder / "few");
  CHECK_FALSE(std::filesystem::exists(folder / "few/calibrators.ecsv"));
  with.threads = 1;
  write_simulation(simulate(with, gauged_template()), with, folder / "one");
  with.threads = 3;
  write_simulation(simulate(with, gauged_template()), with, folder / "three");
  for (const char* file : {"calibrators.ecsv", "host-covariance.ecsv", "lightcurves/lark.ecsv", "truth.ecsv"})
    CHECK(read_file(folder / "one" / file) == read_file(folder / "three" / file));
  const Table table = read_table(folder / "one/calibrators.ecsv");
  CHECK(table.rows() == 5);
  CHECK(table.reals_in("distance_modulus_error", "mag")[0] == Approx(std::hypot(0.05, 0.03)).margin(1e-5));
}

TEST_CASE("measured moduli scatter about the true ones with the covariance that is stated") {
  constexpr int count = 3000;
  double variance = 0, covariance = 0;
  for (int seed = 1; seed <= count; ++seed) {
    const auto hosts = draw_hosts(with_calibrators(static_cast<std::uint64_t>(seed)));
    const double a = hosts[0].measured_modulus - hosts[0].true_modulus;
    const double b = hosts[1].measured_modulus - hosts[1].true_modulus;
    variance += a * a / count;
    covariance += a * b / count;
  }
  const Eigen::MatrixXd stated = host_covariance(with_calibrators(1));
  // Four errors of a variance, sqrt(2/n), and of a covariance.
  CHECK(variance == Approx(stated(0, 0)).epsilon(4 * std::sqrt(2.0 / count)));
  CHECK(std::abs(covariance - stated(0, 1)) < 4 * stated(0, 0) * std::sqrt(2.0 / count));
}

TEST_CASE("calibrators that contradict the surveys are refused") {
  SimulationOptions options = with_calibrators(1);
  options.calibrators.surveys = {"larc"};
  CHECK_THROWS_AS(simulate(options, gauged_template()), InputError);
  options = with_calibrators(1);
  options.calibrators.shared_hosts = 3;
  CHECK_THROWS_AS(simulate(options, gauged_template()), InputError);
  options = with_calibrators(1);
  options.calibrators.prefix = std::string("L");
  CHECK_THROWS_AS(simulate(options, gauged_template()), InputError);
}
