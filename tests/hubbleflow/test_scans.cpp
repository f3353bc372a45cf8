#include <fmt/format.h>

#include <catch2/catch.hpp>
#include <chrono>
#include <cmath>

#include "base/error.h"
#include "hubbleflow/budget.h"
#include "hubbleflow/influence.h"
#include "hubbleflow/look_elsewhere.h"
#include "hubbleflow/scans.h"
#include "hubbleflow/sky_halves.h"
#include "hubbleflow/velocity_covariance.h"
#include "noisy_flow.h"

using namespace thirdrung;
using thirdrung::testing::draw;
using thirdrung::testing::exact_flow;
using thirdrung::testing::example_model;

namespace {

FlowSample noisy(std::size_t count, std::uint64_t seed, std::size_t systematics = 6) {
  FlowSample sample = exact_flow(count, 0.71, seed);
  sample.covariance = example_model(sample, systematics, seed).total();
  Deviates deviates(seed + 1000);
  const Eigen::MatrixXd lower = sample.covariance.llt().matrixL();
  const Eigen::VectorXd noise = draw(lower, deviates);
  for (std::size_t i = 0; i < count; ++i) sample.supernovae[i].m_b_standardised += noise[static_cast<Eigen::Index>(i)];
  return sample;
}

}  // namespace

TEST_CASE("weights of any subset are those of its own fit") {
  const FlowSample sample = noisy(90, 41);
  InterceptOptions options;
  options.fit_dipole = true;
  const ScanFrame frame(sample, options);
  for (const auto& [low, high] : {std::pair{0.02, 0.14}, std::pair{0.08, 0.12}}) {  // above and below half the sample
    InterceptOptions own = options;
    own.z_min = low;
    own.z_max = high;
    const InterceptResult direct = fit_intercept(sample, own);
    const Eigen::VectorXd w = frame.weights(direct.used);
    CHECK(frame.estimate(w) == Approx(direct.a_b).epsilon(1e-10));
    CHECK(frame.error_of(w) == Approx(direct.error).epsilon(1e-8));
  }
}

TEST_CASE("leave-one-out without refitting equals refitting") {
  const FlowSample sample = noisy(60, 42);
  const ScanFrame frame(sample, {});
  const auto rows = influence(frame);
  const auto in = places_of(frame.baseline());
  REQUIRE(rows.size() == in.size());
  for (std::size_t k = 0; k < rows.size(); ++k) {
    std::vector<bool> without = frame.baseline();
    without[static_cast<std::size_t>(in[k])] = false;
    const double refit = fit_intercept(cut(sample, without)).a_b;
    CHECK(rows[k].delta_ab == Approx(refit - frame.a_b()).epsilon(1e-6).margin(1e-12));
    const Eigen::VectorXd d = frame.weights(without) - frame.baseline_weights();
    CHECK(rows[k].delta_ab_error == Approx(frame.error_of(d)).epsilon(1e-6));
  }
}

// The error of a difference must describe its scatter: over 300 simulated surveys with correlated noise and systematics
// the pulls of (subset - full) have width 1 +- 0.08 (two of their own errors, 0.041 each).
TEST_CASE("pulls of differences have unit width for three kinds of subset") {
  const FlowSample truth = exact_flow(150, 0.71, 43);
  const Eigen::MatrixXd covariance = example_model(truth, 6, 43).total();
  const Eigen::MatrixXd lower = covariance.llt().matrixL();
  Deviates deviates(99);
  std::array<double, 3> sum{};
  std::array<double, 3> square{};
  const int surveys = 1200;
  for (int k = 0; k < surveys; ++k) {
    FlowSample sample = truth;
    sample.covariance = covariance;
    const Eigen::VectorXd noise = draw(lower, deviates);
    for (std::size_t i = 0; i < 150; ++i) sample.supernovae[i].m_b_standardised += noise[static_cast<Eigen::Index>(i)];
    const ScanFrame frame(std::move(sample), {});
    std::vector<bool> north = frame.baseline();
    for (std::size_t i = 0; i < 150; ++i) north[i] = north[i] && frame.sample().supernovae[i].dec > 0.0;
    ScanAxis z_min;
    z_min.values = {0.05};
    ScanAxis surveys_axis;
    surveys_axis.kind = ScanKind::surveys;
    const ScanRow rows[] = {run_scan(frame, z_min, 1).front(), run_scan(frame, surveys_axis, 1).front(),
                            scan_subsets(frame, "north", {{"north", {}, north}}, 1).front()};
    for (std::size_t s = 0; s < 3; ++s) {
      const double pull = rows[s].delta_ab / rows[s].delta_ab_error;
      sum[s] += pull / surveys;
      square[s] += pull * pull / surveys;
    }
  }
  for (std::size_t s = 0; s < 3; ++s) {
    const double width = std::sqrt(square[s] - sum[s] * sum[s]);
    fmt::print("pulls of differences, kind {}: mean {:+.3f}, width {:.3f}\n", s + 1, sum[s], width);
    CHECK(width == Approx(1.0).margin(0.08));
    CHECK(std::abs(sum[s]) < 0.1);
  }
}

TEST_CASE("every axis gives rows, the same for any number of threads") {
  const ScanFrame frame(noisy(200, 44), {});
  for (const ScanAxis& axis : default_axes()) {
    const auto rows = run_scan(frame, axis, 2);
    const auto again = run_scan(frame, axis, 1);
    INFO(name_of(axis.kind));
    REQUIRE(!rows.empty());
    REQUIRE(rows.size() == again.size());
    for (std::size_t k = 0; k < rows.size(); ++k) {
      CHECK(rows[k].setting == again[k].setting);
      CHECK((rows[k].delta_ab == again[k].delta_ab || std::isnan(rows[k].delta_ab)));
      CHECK(rows[k].caution == again[k].caution);
    }
    CHECK(scan_kind(name_of(axis.kind)) == axis.kind);
  }
  CHECK_THROWS_WITH(scan_kind("zmin"), Catch::Contains("z_min"));
  ScanAxis narrow;
  narrow.values = {0.0233, 0.149};
  const auto rows = run_scan(frame, narrow);
  CHECK(rows[0].delta_ab == 0.0);
  CHECK_THAT(rows[1].caution, Catch::Contains("fewer than 10"));
  CHECK(std::isnan(rows[1].a_b));
}

TEST_CASE("divisions leave out what has no value, and say so") {
  FlowSample sample = noisy(120, 45);
  sample.supernovae[5].host_log_mass = std::nan("");
  sample.supernovae[5].z_flow = 0.05;
  const ScanFrame frame(sample, {});
  ScanAxis axis;
  axis.kind = ScanKind::host_mass;
  const auto rows = run_scan(frame, axis);
  REQUIRE(rows.size() == 3);
  CHECK_THAT(rows[0].setting, Catch::Contains("1 without a value"));
  const auto total = static_cast<std::size_t>(std::count(frame.baseline().begin(), frame.baseline().end(), true));
  CHECK(rows[0].supernovae + rows[1].supernovae == total - 1);
  CHECK(rows[2].delta_ab == Approx(rows[0].a_b - rows[1].a_b).margin(1e-12));
}

// Source: for k independent settings the chance is 1 - (1 - p)^k; p = 0.0455 at two errors, k = 10 gives 0.372. Fully
// correlated settings are one. Tolerance: three errors of 10000 draws.
TEST_CASE("look-elsewhere chance of independent and of equal settings") {
  CHECK(probability_of_extreme(Eigen::MatrixXd::Identity(10, 10), 2.0) == Approx(0.3723).margin(0.015));
  CHECK(probability_of_extreme(Eigen::MatrixXd::Ones(10, 10), 2.0) == Approx(0.0455).margin(0.0065));
  CHECK(probability_of_extreme(Eigen::MatrixXd::Zero(3, 3), 2.0) == 1.0);
}

TEST_CASE("a tilted sky is found by the halves") {
  FlowSample sample = noisy(300, 46, 0);
  for (auto& s : sample.supernovae) s.m_b_standardised += s.dec > 0.0 ? 0.1 : -0.1;
  const ScanFrame frame(sample, {});
  const SkyHalvesMap map = sky_halves(frame, 64);
  CHECK(map.poles[map.largest].dec > 60.0);
  CHECK(map.largest_pull > 8.0);
  CHECK(map.chance < 0.001);
  CHECK(map.poles[map.largest].difference == Approx(-0.04).margin(0.01));
}

TEST_CASE("resampling errors agree with the covariance for independent supernovae") {
  FlowSample sample = exact_flow(300, 0.71, 47);
  Deviates deviates(5);
  for (std::size_t i = 0; i < 300; ++i) {
    const auto ii = static_cast<Eigen::Index>(i);
    sample.supernovae[i].m_b_standardised += std::sqrt(sample.covariance(ii, ii)) * deviates.normal();
  }
  const ScanFrame frame(sample, {});
  ScanAxis axis;
  axis.kind = ScanKind::jackknife;
  // The scatter of 250 supernovae gives an error good to 5%; three of those.
  CHECK(run_scan(frame, axis).front().a_b_error == Approx(frame.error()).epsilon(0.15));
  axis.kind = ScanKind::bootstrap;
  CHECK(run_scan(frame, axis).front().a_b_error == Approx(frame.error()).epsilon(0.15));
}

TEST_CASE("three hundred supernovae, sixty systematics, every scan", "[timing]") {
  const auto start = std::chrono::steady_clock::now();
  const FlowSample sample = noisy(300, 48, 60);
  const ScanFrame frame(sample, {});
  std::size_t rows = 0;
  for (const ScanAxis& axis : default_axes()) rows += run_scan(frame, axis).size();
  const Budget budget = make_budget(cut(example_model(exact_flow(300, 0.71, 48), 60, 48), frame.baseline()),
                                    frame.baseline_weights()(places_of(frame.baseline())));
  rows += influence(frame).size();
  const double seconds = std::chrono::duration<double>(std::chrono::steady_clock::now() - start).count();
  fmt::print("300 supernovae, 60 systematics, {} rows of scans and a budget of {}: {:.2f} s\n", rows,
             budget.rows.size(), seconds);
  CHECK(seconds < 60.0);
}

TEST_CASE("two thousand supernovae with a full covariance and every scan", "[.][timing]") {
  FlowSample sample = exact_flow(2000, 0.71, 49);
  const auto start = std::chrono::steady_clock::now();
  sample.covariance = example_model(sample, 60, 49).total() + velocity_covariance(sample.supernovae, {});
  const ScanFrame frame(std::move(sample), {});
  const auto since = [](auto t) { return std::chrono::duration<double>(std::chrono::steady_clock::now() - t).count(); };
  fmt::print("2000 supernovae: frame after {:.1f} s\n", since(start));
  for (const ScanAxis& axis : default_axes()) {
    const auto begun = std::chrono::steady_clock::now();
    const std::size_t rows = run_scan(frame, axis).size();
    fmt::print("  {}: {} rows, {:.1f} s\n", name_of(axis.kind), rows, since(begun));
  }
  fmt::print("  influence: {} rows\n2000 supernovae, all: {:.1f} s\n", influence(frame).size(), since(start));
  CHECK(since(start) < 180.0);
}

TEST_CASE("the chance of the largest of many pulls") {
  CHECK(chance_of_largest_pull(1.959964, 1) == Approx(0.05).epsilon(1e-4));
  // 1 - 0.95^20.
  CHECK(chance_of_largest_pull(-1.959964, 20) == Approx(0.641514).epsilon(1e-4));
  CHECK(chance_of_largest_pull(9.0, 100) == Approx(100 * 2.257e-19).epsilon(1e-3));
}
