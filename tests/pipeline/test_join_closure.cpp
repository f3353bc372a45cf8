// Closure of the join: calibrators and Hubble flow of a known M_B and H0 go through standardisation and ladder, and
// both come back with the errors stated.
#include <catch2/catch.hpp>
#include <cmath>

#include "ladder/solve_ladder.h"
#include "pipeline/closure_chain.h"
#include "simulation/random_stream.h"
#include "simulation/small_survey.h"

using namespace thirdrung;
using namespace thirdrung::testing;

namespace {

constexpr double modulus_error = 0.08, common_error = 0.02;  // [mag]

/// The Hubble flow, and a second survey of calibrators.
SimulationOptions flow_and_calibrators(std::uint64_t seed) {
  SimulationOptions options = small_survey(120, seed);
  options.surveys[0].z_min = 0.015;
  options.surveys[0].z_max = 0.12;
  SimulatedSurvey near = options.surveys[0];
  near.name = "near";
  near.prefix = "Near";
  near.supernovae = 25;
  near.z_min = 0.004;
  near.z_max = 0.01;
  options.surveys.push_back(near);
  return options;
}

double true_modulus(const SimulationOptions& options, const SupernovaTruth& truth) {
  SimulatedRelation relation = options.relation;
  relation.absolute_magnitude = relation.alpha = relation.beta = relation.gamma = 0.0;
  return relation_magnitude(relation, truth);
}

struct Split {
  std::vector<StandardisationDatum> flow, near;
  std::vector<double> modulus;
};

bool usual(const StandardisationDatum& one) {
  return std::abs(one.c) < 0.3 && one.s > 0.75 && one.s < 1.3;
}

Split split(const SimulationOptions& options) {
  const RedshiftOptions frames;
  const InterceptOptions intercept;
  Split out;
  const auto summaries = simulate_summaries(options);
  const auto data = data_of(summaries, frames);
  for (std::size_t i = 0; i < data.size(); ++i) {
    if (!usual(data[i])) continue;
    if (summaries[i].supernova.survey == "near") {
      out.near.push_back(data[i]);
      out.modulus.push_back(true_modulus(options, summaries[i].truth));
    } else if (data[i].z_flow > intercept.z_min && data[i].z_flow < intercept.z_max) {
      out.flow.push_back(data[i]);
    }
  }
  return out;
}

/// Both sides standardised with the coefficients of the flow, as the pipeline does.
LadderSolution ladder_of(const SimulationOptions& options, std::uint64_t seed) {
  const Split sides = split(options);
  const HierarchicalOptions standardisation;
  const StandardisationResult result = fit_hierarchical(sides.flow, standardisation);
  std::vector<StandardisationDatum> both = sides.near;
  both.insert(both.end(), sides.flow.begin(), sides.flow.end());
  const auto magnitudes = standardise(both, coefficients(result), standardisation.host_mass);

  RandomStream noise(seed, {77});
  const double common = common_error * noise.normal();
  const auto calibrators = static_cast<Eigen::Index>(sides.near.size());
  const auto all = static_cast<Eigen::Index>(both.size());
  LadderSupernovae ladder;
  HostDistances& distances = ladder.calibrators.distances;
  distances.modulus.resize(calibrators);
  distances.covariance = Eigen::MatrixXd::Constant(calibrators, calibrators, common_error * common_error);
  distances.covariance.diagonal().array() += modulus_error * modulus_error;
  ladder.m_b_standardised.resize(calibrators);
  Eigen::VectorXd variance(all);
  for (Eigen::Index i = 0; i < all; ++i) {
    const auto k = static_cast<std::size_t>(i);
    variance[i] = magnitudes[k].variance();
    ladder.uncertainty.supernovae.push_back(both[k].name);
    if (i < calibrators) {
      ladder.calibrators.calibrators.push_back({both[k].name, both[k].name, {}});
      distances.hosts.push_back(both[k].name);
      distances.modulus[i] = sides.modulus[k] + common + modulus_error * noise.normal();
      ladder.m_b_standardised[i] = magnitudes[k].magnitude;
    } else {
      FlowSupernova one;
      one.name = both[k].name;
      one.z_flow = both[k].z_flow;
      one.z_helio = both[k].z_helio;
      one.m_b_standardised = magnitudes[k].magnitude;
      ladder.flow.push_back(one);
    }
  }
  variance.tail(all - calibrators) +=
      velocity_scatter_part(ladder.flow, Expansion(), options.velocities.sigma_v).diagonal;
  CovariancePart scatter{"scatter", "statistical", variance, {}};
  const Eigen::MatrixXd shifts = coefficient_shifts(both, result, standardisation.host_mass);
  CovariancePart common_part{"standardisation coefficients", "statistical", {}, shifts * shifts.transpose(), false};
  ladder.uncertainty.parts = {scatter, common_part};
  return solve_ladder(make_ladder_block(ladder, {}));
}

struct Pulls {
  double sum = 0, squares = 0;
  int count = 0;
  void add(double pull) { sum += pull, squares += pull * pull, ++count; }
  double mean() const { return sum / count; }
  double width() const { return std::sqrt(squares / count - mean() * mean()); }
};

}  // namespace

TEST_CASE("M_B and H0 of many simulated ladders come back with the errors that are stated", "[closure]") {
  Pulls h0, m_b;
  constexpr int count = 300;
  for (std::uint64_t seed = 1; seed <= count; ++seed) {
    const SimulationOptions options = flow_and_calibrators(seed);
    const LadderSolution solved = ladder_of(options, seed);
    h0.add((solved.five_log10_h0 - 5 * std::log10(options.relation.h0)) / solved.five_log10_h0_error);
    m_b.add((solved.m_b - options.relation.absolute_magnitude) / solved.m_b_error);
  }
  INFO("H0: mean pull " << h0.mean() << ", width " << h0.width() << "; M_B: " << m_b.mean() << ", " << m_b.width());
  // Three and a half errors of the mean and of the width of so many normal deviates.
  for (const Pulls& one : {h0, m_b}) {
    CHECK(std::abs(one.mean()) < 3.5 / std::sqrt(count));
    CHECK(std::abs(one.width() - 1) < 3.5 / std::sqrt(2.0 * count));
  }
}
