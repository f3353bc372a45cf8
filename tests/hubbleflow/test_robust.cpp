#include <catch2/catch.hpp>
#include <cmath>

#include "hubbleflow/robust.h"
#include "noisy_flow.h"

using namespace thirdrung;
using thirdrung::testing::draw;
using thirdrung::testing::exact_flow;
using thirdrung::testing::example_model;

namespace {

FlowSample with_outliers(bool correlated) {
  FlowSample sample = exact_flow(150, 0.71, 51);
  if (correlated) sample.covariance = example_model(sample, 4, 51).total();
  Deviates deviates(52);
  const Eigen::MatrixXd lower = sample.covariance.llt().matrixL();
  const Eigen::VectorXd noise = draw(lower, deviates);
  for (std::size_t i = 0; i < 150; ++i) sample.supernovae[i].m_b_standardised += noise[static_cast<Eigen::Index>(i)];
  for (const std::size_t i : {20u, 70u, 110u}) {
    sample.supernovae[i].m_b_standardised += 1.2;
    sample.supernovae[i].name = "odd";
    sample.supernovae[i].name += static_cast<char>('a' + static_cast<char>(i % 26));
    sample.supernovae[i].z_flow = std::max(sample.supernovae[i].z_flow, 0.03);
  }
  return sample;
}

}  // namespace

TEST_CASE("both robust estimates find the outliers and are less moved by them") {
  for (const bool correlated : {false, true}) {
    const FlowSample sample = with_outliers(correlated);
    const ScanFrame frame(sample, {});
    std::vector<bool> clean = frame.baseline();
    for (std::size_t i = 0; i < clean.size(); ++i) clean[i] = clean[i] && sample.supernovae[i].name[0] == 'Q';
    const double without = frame.estimate(frame.weights(clean));
    const RobustResult rejected = chauvenet(frame);
    const RobustResult student = student_t(frame, own_variance(frame));
    for (const RobustResult* result : {&rejected, &student}) {
      INFO(result->method << ", rounds " << result->rounds);
      REQUIRE(result->mistrusted.size() >= 3);
      REQUIRE(result->mistrusted.size() < 8);
      for (std::size_t k = 0; k < 3; ++k) {
        CHECK(result->mistrusted[k].supernova.starts_with("odd"));
        CHECK(result->mistrusted[k].pull > 4.0);
      }
      CHECK(std::abs(result->a_b - without) < 0.35 * std::abs(frame.a_b() - without));
      CHECK(result->delta_ab == Approx(result->a_b - frame.a_b()).margin(1e-12));
      CHECK(result->delta_ab_error > 0.0);
    }
  }
}

TEST_CASE("what a supernova has of its own leaves the rest positive semi-definite") {
  FlowSample sample = exact_flow(100, 0.71, 53);
  sample.covariance = example_model(sample, 5, 53).total();
  const ScanFrame frame(sample, {});
  const Eigen::VectorXd own = own_variance(frame);
  Eigen::MatrixXd rest = sample.covariance;
  rest.diagonal() -= own;
  rest.diagonal().array() += 1e-12;
  CHECK(rest.llt().info() == Eigen::Success);
  for (Eigen::Index i = 0; i < 100; ++i) CHECK(own[i] > 0.5 * example_model(sample, 5, 53).parts[0].diagonal[i]);
}

// Chauvenet's criterion itself: of 15 the limit is 2.13 errors (Taylor 1997, An Introduction to Error Analysis,
// sect. 6.2: P = 0.5/15), so that one at 2.0 stays and one at 2.3 goes.
TEST_CASE("Chauvenet's limit for fifteen", "[published]") {
  for (const double pull : {2.0, 2.4}) {
    FlowSample sample = exact_flow(15, 0.71, 54);
    for (auto& s : sample.supernovae) s.z_flow = s.z_helio = 0.06;
    const FlowSample reference = exact_flow(1, 0.71, 54);
    for (std::size_t i = 0; i < 15; ++i) {
      sample.covariance(static_cast<Eigen::Index>(i), static_cast<Eigen::Index>(i)) = 0.01;
      sample.supernovae[i].m_b_standardised = 0.0;
      sample.supernovae[i].m_b_standardised =
          5.0 * (single_intercepts(std::span(&sample.supernovae[i], 1), {})[0] - 0.71);
    }
    // Pulled away from the mean of fifteen by `pull` errors after the mean has followed by a fifteenth.
    sample.supernovae[3].m_b_standardised += 0.1 * pull * 15.0 / 14.0;
    const RobustResult result = chauvenet(ScanFrame(sample, {}));
    CHECK(result.mistrusted.size() == (pull > 2.13 ? 1 : 0));
  }
}
