#include <fmt/format.h>

#include <catch2/catch.hpp>
#include <cmath>
#include <cstdlib>
#include <fstream>

#include "base/error.h"
#include "simulated_set.h"
#include "standardisation/hierarchical.h"
#include "standardisation/sampling.h"

using namespace thirdrung;
using thirdrung::testing::simulated_set;
using thirdrung::testing::Truth;

TEST_CASE("derivatives of the population likelihood agree with differences") {
  HierarchicalOptions options;
  options.population_per_survey = true;
  const PopulationData data = population_data(simulated_set(60, 3), options);
  REQUIRE(data.groups.size() == 2);
  const PopulationLayout layout = data.layout();
  Eigen::VectorXd p(11);
  p << -19.1, 1.1, 2.7, 0.05, std::log(0.12), std::log(0.1), std::log(0.06), 0.95, 0.01, 0.99, -0.02;
  const PopulationLikelihood at = population_likelihood(data.data, layout, p, Derivatives::second);
  for (Eigen::Index i = 0; i < p.size(); ++i) {
    const double h = 1e-5;
    Eigen::VectorXd up = p;
    Eigen::VectorXd down = p;
    up[i] += h;
    down[i] -= h;
    const PopulationLikelihood plus = population_likelihood(data.data, layout, up, Derivatives::first);
    const PopulationLikelihood minus = population_likelihood(data.data, layout, down, Derivatives::first);
    CHECK(at.gradient[i] == Approx((plus.value - minus.value) / (2.0 * h)).epsilon(1e-5).margin(1e-4));
    const Eigen::VectorXd row = (plus.gradient - minus.gradient) / (2.0 * h);
    for (Eigen::Index j = 0; j < p.size(); ++j) CHECK(at.hessian(i, j) == Approx(row[j]).epsilon(1e-6).margin(1e-3));
  }
}

// Regression dilution and its cure (March et al. 2011, MNRAS 418, 2308): with errors of s and c at about half the
// populations' widths the hierarchical fit must have pulls of mean below 0.1 and width 1 +- 0.1 over 600 sets (their
// own scatter is 0.03 and 0.02), the ordinary one slopes that are low by the dilution factor.
TEST_CASE("hierarchical fit is unbiased and the ordinary one is not") {
  const Truth t;
  const std::size_t sets = 1200;
  const std::vector<std::pair<std::string, double>> truth = {
      {"alpha", t.alpha},         {"beta", t.beta},       {"gamma", t.gamma},
      {"sigma_int", t.sigma_int}, {"s_mean", t.s_mean},   {"s_width", t.s_width},
      {"c_mean", t.c_mean},       {"c_width", t.c_width}, {"intercept", t.intercept}};
  const auto is_width = [](const std::string& name) {
    return name == "sigma_int" || name == "s_width" || name == "c_width";
  };
  std::vector<double> sum(truth.size(), 0.0);
  std::vector<double> square(truth.size(), 0.0);
  for (std::size_t k = 0; k < sets; ++k) {
    const StandardisationResult fit = fit_hierarchical(simulated_set(300, 1000 + k, t));
    for (std::size_t i = 0; i < truth.size(); ++i) {
      // The error of a width is proportional to it; scaled to the true width, so that a low one does not count for
      // more.
      const double value = fit.value(truth[i].first);
      const double error = fit.error(truth[i].first) * (is_width(truth[i].first) ? truth[i].second / value : 1.0);
      const double pull = (value - truth[i].second) / error;
      sum[i] += pull;
      square[i] += pull * pull;
    }
  }
  for (std::size_t i = 0; i < truth.size(); ++i) {
    const double mean = sum[i] / static_cast<double>(sets);
    const double width = std::sqrt(square[i] / static_cast<double>(sets) - mean * mean);
    INFO(fmt::format("{}: mean pull {:.3f}, width {:.3f}", truth[i].first, mean, width));
    CHECK(std::abs(mean) < 0.1);
    CHECK(width == Approx(1.0).margin(0.1));
  }
}

TEST_CASE("curvature errors agree with sampling") {
  const auto data = simulated_set(200, 11);
  const HierarchicalOptions options;
  const StandardisationResult fit = fit_hierarchical(data, options);
  SamplingOptions sampling;
  sampling.steps = 1500;
  const SamplingResult sampled = sample_hierarchical(data, options, fit, sampling);
  CHECK(sampled.accepted > 0.2);
  REQUIRE(sampled.parameters.size() == 9);
  for (const SampledParameter& p : sampled.parameters) {
    INFO(fmt::format("{} fit {:.5f} +- {:.5f}, sampled {:.5f} +- {:.5f}, tau {:.1f}", p.name, fit.value(p.name),
                     fit.error(p.name), p.mean, p.deviation, p.autocorrelation_steps));
    // The posterior of 200 supernovae is slightly skew; a tenth in the error and a quarter of it in the mean show that.
    CHECK(p.deviation == Approx(fit.error(p.name)).epsilon(0.12));
    CHECK(std::abs(p.mean - fit.value(p.name)) < 0.3 * fit.error(p.name));
    CHECK(p.autocorrelation_steps < 150.0);
  }
}

TEST_CASE("held coefficients, absent masses and populations per survey") {
  auto data = simulated_set(120, 5);
  HierarchicalOptions options;
  options.alpha = 1.3;
  options.population_per_survey = true;
  const StandardisationResult fit = fit_hierarchical(data, options);
  CHECK(fit.value("alpha") == 1.3);
  CHECK(fit.error("alpha") == 0.0);
  CHECK(fit.value("s_mean[north]") == Approx(0.97).margin(0.05));
  CHECK(fit.error("c_mean[south]") > 0.0);
  for (auto& d : data) d.host_log_mass = std::nan("");
  const StandardisationResult without = fit_hierarchical(data);
  CHECK(without.value("gamma") == 0.0);
  REQUIRE(without.remarks.size() == 1);
  CHECK_THAT(without.remarks[0], Catch::Contains("host-mass step"));
  CHECK_THROWS_AS(fit_hierarchical(std::span(data).first(9)), NoResultError);
}

TEST_CASE("a width that vanishes is held at its bound") {
  Truth t;
  t.sigma_int = 0.0;
  t.m_error = 0.1;
  std::size_t held = 0;
  for (std::uint64_t seed = 0; seed < 10; ++seed) held += fit_hierarchical(simulated_set(40, seed, t)).remarks.size();
  CHECK(held > 2);
}

TEST_CASE("shrunk magnitudes reproduce the fitted intercept") {
  const auto data = simulated_set(300, 8);
  const StandardisationResult fit = fit_hierarchical(data);
  double weights = 0.0;
  double shrunk = 0.0;
  for (std::size_t i = 0; i < data.size(); ++i) {
    const double w = 1.0 / (fit.magnitudes[i].shrunk_variance + data[i].flow_variance);
    weights += w;
    shrunk += w * (fit.magnitudes[i].shrunk_magnitude - data[i].modulus);
    CHECK(fit.magnitudes[i].shrunk_variance < fit.magnitudes[i].variance());
  }
  // At the maximum the derivative with respect to the intercept vanishes, which is this weighted mean.
  CHECK(shrunk / weights == Approx(fit.value("intercept")).margin(1e-7));
}

// Run by test_likelihood_scipy.py, which redoes the sums: writes a set and what the fit makes of it.
TEST_CASE("write a fitted set for the scipy comparison", "[.dump]") {
  const char* path = std::getenv("THIRDRUNG_DUMP");
  REQUIRE(path != nullptr);
  const auto data = simulated_set(150, 21);
  HierarchicalOptions options;
  options.restricted_widths = false;  // so that scipy's maximum is the same
  const StandardisationResult fit = fit_hierarchical(data, options);
  std::ofstream out(path);
  out << "{\"data\": [";
  for (std::size_t i = 0; i < data.size(); ++i) {
    const auto& d = data[i];
    const auto& v = d.covariance;
    out << (i > 0 ? "," : "")
        << fmt::format("[{:.17g},{:.17g},{:.17g},{:.17g},{:.17g},{:.17g},{:.17g},{:.17g},{:.17g},{:.17g},{:.17g}]",
                       d.m_b - d.modulus, d.s, d.c, v(0, 0), v(0, 1), v(0, 2), v(1, 1), v(1, 2), v(2, 2),
                       d.flow_variance, fit.magnitudes[i].mass_probability);
  }
  out << "], \"names\": [";
  for (std::size_t i = 0; i < fit.parameters.size(); ++i)
    out << (i > 0 ? "," : "") << '"' << fit.parameters[i].name << '"';
  out << "], \"values\": [";
  for (std::size_t i = 0; i < fit.parameters.size(); ++i)
    out << (i > 0 ? "," : "") << fmt::format("{:.17g}", fit.parameters[i].value);
  out << "], \"errors\": [";
  for (std::size_t i = 0; i < fit.parameters.size(); ++i)
    out << (i > 0 ? "," : "") << fmt::format("{:.17g}", fit.parameters[i].error);
  out << fmt::format("], \"minus_two_ln_likelihood\": {:.17g}}}\n", fit.minus_two_ln_likelihood);
}
