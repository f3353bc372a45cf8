#include <Eigen/LU>
#include <catch2/catch.hpp>
#include <cmath>
#include <numbers>

#include "base/error.h"
#include "ladder/absolute_magnitude_join.h"
#include "ladder/small_ladder.h"
#include "ladder/solve_ladder.h"
#include "tables/fits_image.h"
#include "tables/scratch_folder.h"

using namespace thirdrung;
using namespace thirdrung::testing;

TEST_CASE("a ladder without noise gives back M_B and H0") {
  const LadderSolution solved = solve_ladder(make_ladder_block(small_ladder(-19.2, 71.0), {}));
  CHECK(solved.m_b == Approx(-19.2).margin(1e-10));
  CHECK(solved.h0 == Approx(71.0).epsilon(1e-10));
  CHECK(solved.chi2 == Approx(0.0).margin(1e-12));
  CHECK(solved.dof == 2);
}

// By hand: M_B has the variance of the mean of two calibrators, (0.01 + 0.02)/2 + 0.01 common = 0.025; the mean of the
// Hubble flow, M_B - 5 log10 H0, that of two supernovae, 0.01. They share nothing here, so that
// var(5 log10 H0) = 0.035 and cov(M_B, 5 log10 H0) = 0.025.
TEST_CASE("two calibrators and two supernovae have the error worked out by hand") {
  const LadderSolution solved = solve_ladder(make_ladder_block(small_ladder(-19.2, 71.0), {}));
  CHECK(solved.m_b_error == Approx(std::sqrt(0.025)));
  CHECK(solved.five_log10_h0_error == Approx(std::sqrt(0.035)));
  CHECK(solved.correlation == Approx(0.025 / std::sqrt(0.025 * 0.035)));
  CHECK(solved.h0_error == Approx(71.0 * 0.2 * std::numbers::ln10 * std::sqrt(0.035)));
  CHECK(solved.shares.calibrators == Approx(0.025 / 0.035));
  CHECK(solved.shares.distances == Approx(0.02 / 0.035));
  CHECK(solved.shares.hubble_flow == Approx(0.01 / 0.035));
  CHECK(solved.shares.systematics == 0.0);
}

TEST_CASE("without shared errors the ladder is the join of its M_B with the intercept of its Hubble flow") {
  LadderSupernovae ladder = small_ladder(-19.2, 71.0);
  ladder.m_b_standardised += Eigen::Vector2d(0.05, -0.02);
  ladder.flow[0].m_b_standardised += 0.08;
  const LadderSolution solved = solve_ladder(make_ladder_block(ladder, {}));
  InterceptOptions options;
  options.fewest = 2;
  const InterceptResult flow = fit_intercept({ladder.flow, 0.02 * Eigen::MatrixXd::Identity(2, 2)}, options);
  const HubbleConstant joined = join_absolute_magnitude(flow.a_b, flow.error, solved.m_b, solved.m_b_error);
  CHECK(solved.h0 == Approx(joined.h0).epsilon(1e-12));
  CHECK(solved.h0_error == Approx(joined.error).epsilon(1e-12));
  CHECK(solved.shares.calibrators == Approx(joined.share_of_calibration).epsilon(1e-12));
}

TEST_CASE("an error common to calibrators and Hubble flow moves M_B and leaves H0") {
  LadderSupernovae ladder = small_ladder(-19.2, 71.0);
  const LadderSolution before = solve_ladder(make_ladder_block(ladder, {}));
  ladder.uncertainty.systematics.push_back(
      {"zero point", "zero point", 0.05, "mag", Eigen::VectorXd::Constant(4, 0.05), true});
  const LadderSolution after = solve_ladder(make_ladder_block(ladder, {}));
  CHECK(after.h0_error == Approx(before.h0_error).epsilon(1e-9));
  CHECK(after.m_b_error == Approx(std::hypot(before.m_b_error, 0.05)).epsilon(1e-9));
  CHECK(after.shares.systematics == Approx(0.0).margin(1e-12));
}

TEST_CASE("two supernovae of one host share its modulus") {
  LadderSupernovae ladder = small_ladder(-19.2, 71.0);
  ladder.calibrators.calibrators[1].host = "Elm";
  ladder.calibrators.distances.hosts = {"Elm"};
  ladder.calibrators.distances.modulus = Eigen::VectorXd::Constant(1, 30.0);
  ladder.calibrators.distances.covariance = Eigen::MatrixXd::Constant(1, 1, 0.03);
  ladder.m_b_standardised = Eigen::Vector2d(10.8, 10.8);
  const LadderSolution solved = solve_ladder(make_ladder_block(ladder, {}));
  // The modulus counts once, however many supernovae.
  CHECK(solved.m_b_error == Approx(std::sqrt(0.03 + 0.01 / 2)));
  CHECK(solved.m_b == Approx(-19.2).margin(1e-10));
}

TEST_CASE("shares add up to one and the errors of the coefficients do not weigh") {
  LadderSupernovae ladder = small_ladder(-19.2, 71.0);
  ladder.m_b_standardised += Eigen::Vector2d(0.1, -0.1);
  const LadderSolution before = solve_ladder(make_ladder_block(ladder, {}));
  CovariancePart coefficients;
  coefficients.name = "standardisation coefficients";
  coefficients.weighs = false;
  const Eigen::Vector4d slope(0.1, -0.2, 0.15, 0.05);
  coefficients.matrix = slope * slope.transpose();
  ladder.uncertainty.parts.push_back(coefficients);
  const LadderSolution with = solve_ladder(make_ladder_block(ladder, {}));
  CHECK(with.h0 == Approx(before.h0).epsilon(1e-12));
  CHECK(with.h0_error > before.h0_error);
  CHECK(with.shares.coefficients > 0.0);
  ladder.uncertainty.systematics = {{"one", "zero point", 1, "", Eigen::Vector4d(0.02, 0.03, 0.01, 0.0), true},
                                    {"two", "redshift", 1, "", Eigen::Vector4d(0.0, 0.0, 0.03, 0.01), true}};
  const LadderSolution all = solve_ladder(make_ladder_block(ladder, {}));
  const LadderShares& s = all.shares;
  CHECK(s.calibrators + s.hubble_flow + s.coefficients + s.systematics == Approx(1.0).epsilon(1e-12));
  CHECK(s.systematics > 0.0);
  CHECK(s.distances < s.calibrators);
}

TEST_CASE("a q0 fitted along is a parameter of the block") {
  LadderSupernovae ladder = small_ladder(-19.2, 71.0);
  for (const double z : {0.05, 0.1, 0.12}) {
    FlowSupernova one;
    one.name = "flow at " + std::to_string(z);
    one.z_flow = one.z_helio = z;
    one.m_b_standardised =
        -19.2 + 5.0 * (log_expansion_term(z, Expansion::series(-0.3, 1.0)) - std::log10(71.0)) + 25.0;
    ladder.flow.push_back(one);
    ladder.uncertainty.supernovae.push_back(one.name);
  }
  for (std::size_t i = 0; i < 2; ++i) {
    const double z = ladder.flow[i].z_flow;
    ladder.flow[i].m_b_standardised =
        -19.2 + 5.0 * (log_expansion_term(z, Expansion::series(-0.3, 1.0)) - std::log10(71.0)) + 25.0;
  }
  ladder.uncertainty.parts[0].diagonal = Eigen::VectorXd::Constant(7, 0.02);
  InterceptOptions options;
  options.fit_q0 = true;
  options.fewest = 3;
  const LadderBlock block = make_ladder_block(ladder, options);
  CHECK(block.parameters.back().name == "q0");
  const LadderSolution solved = solve_ladder(block);
  CHECK(solved.h0 == Approx(71.0).epsilon(1e-7));
  CHECK(solved.theta(solved.theta.size() - 1) == Approx(0.0).margin(1e-6));  // What is left beside the fitted q0.
}

TEST_CASE("a covariance that is not positive definite is refused") {
  LadderSupernovae ladder = small_ladder(-19.2, 71.0);
  ladder.uncertainty.parts[0].diagonal(0) = -1.0;
  CHECK_THROWS_AS(solve_ladder(make_ladder_block(ladder, {})), InputError);
}

TEST_CASE("the block is written with everything that it takes to solve it") {
  const testing::ScratchFolder folder;
  const LadderBlock block = make_ladder_block(small_ladder(-19.2, 71.0), {});
  const LadderSolution solved = solve_ladder(block);
  const auto path = folder.path() / "ladder-block.fits";
  write_ladder_block(block, solved, true, path);
  const FitsReader reader(path);
  CHECK(reader.keyword("blind") == "T");
  CHECK(reader.image("y").values.size() == 6);
  CHECK(reader.image("L").shape == std::vector<std::size_t>{6, 4});
  CHECK(reader.image("C").shape == std::vector<std::size_t>{6, 6});
  CHECK(reader.table("parameters").strings("name") ==
        std::vector<std::string>{"mu Elm", "mu Oak", "M_B", "five_log10_H0"});
  CHECK(reader.table("rows").strings("kind") ==
        std::vector<std::string>{"calibrator", "calibrator", "hubble_flow", "hubble_flow", "host", "host"});
}

// Source: Riess et al. 2022, ApJL 934, L7: M_B = -19.253 mag, H0 = 73.04 km/s/Mpc, a_B = 0.714158. Tolerance: half the
// last digit of H0.
TEST_CASE("a Hubble flow at the published intercept and M_B gives the published H0", "[published]") {
  LadderSupernovae ladder = small_ladder(-19.253, 73.0);
  for (FlowSupernova& one : ladder.flow) one.m_b_standardised = 5.0 * (log_expansion_term(one.z_flow) - 0.714158);
  const LadderSolution solved = solve_ladder(make_ladder_block(ladder, {}));
  CHECK(solved.m_b == Approx(-19.253).margin(1e-10));
  CHECK(solved.h0 == Approx(73.04).margin(0.005));
}
