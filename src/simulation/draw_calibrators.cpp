#include "simulation/draw_calibrators.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "base/error.h"

namespace thirdrung {

namespace {

/// What a stream of random numbers is for; simulate.cpp has the first four.
enum Purpose : std::uint64_t { host_draws = 5, modulus_draws };

/// Below this the motion of the Sun and of the host leave no redshift to speak of.
constexpr double smallest_redshift = 5e-4;
constexpr std::uint64_t most_attempts = 1000;

SupernovaTruth draw_place(const SimulationOptions& options, const SimulatedSurvey& survey,
                          const VolumeRedshifts& redshifts, std::uint64_t number) {
  for (std::uint64_t attempt = 0; attempt < most_attempts; ++attempt) {
    RandomStream stream(options.seed, {host_draws, number, attempt});
    SupernovaTruth place = draw_supernova(options, survey, redshifts, stream);
    if (place.z_helio > smallest_redshift) return place;
  }
  throw InputError({options.origin, {}, "calibrators"}, "no host has a positive redshift",
                   "raise z_min of [calibrators], or lower the velocities");
}

std::size_t survey_number(const SimulationOptions& options, std::size_t host) {
  const auto& names = options.calibrators.surveys;
  if (names.empty()) return 0;
  const std::string& name = names[host % names.size()];
  const auto found = std::find_if(options.surveys.begin(), options.surveys.end(),
                                  [&](const SimulatedSurvey& one) { return one.name == name; });
  return static_cast<std::size_t>(found - options.surveys.begin());
}

}  // namespace

std::vector<std::size_t> hosts_of_calibrators(const SimulatedCalibrators& calibrators) {
  std::vector<std::size_t> out;
  for (std::size_t i = 0; i < calibrators.supernovae; ++i)
    out.push_back(i < 2 * calibrators.shared_hosts ? i / 2 : i - calibrators.shared_hosts);
  return out;
}

std::vector<SimulatedHost> draw_hosts(const SimulationOptions& options) {
  const SimulatedCalibrators& calibrators = options.calibrators;
  if (calibrators.supernovae == 0) return {};
  const VolumeRedshifts redshifts(calibrators.z_min, calibrators.z_max, options.relation.expansion);
  RandomStream moduli(options.seed, {modulus_draws});
  const double common = calibrators.common_error * moduli.normal();
  std::vector<SimulatedHost> out(calibrators.supernovae - calibrators.shared_hosts);
  for (std::size_t h = 0; h < out.size(); ++h) {
    SimulatedHost& host = out[h];
    host.name = fmt::format("{} {}", calibrators.host_prefix, h + 1);
    host.survey = survey_number(options, h);
    host.place = draw_place(options, options.surveys[host.survey], redshifts, h);
    SimulatedRelation relation = options.relation;  // What a supernova without corrections would have, at M_B = 0.
    relation.absolute_magnitude = relation.alpha = relation.beta = relation.gamma = 0.0;
    host.true_modulus = relation_magnitude(relation, host.place);
    host.measured_modulus = host.true_modulus + common + calibrators.modulus_error * moduli.normal();
  }
  return out;
}

Eigen::MatrixXd host_covariance(const SimulationOptions& options) {
  const SimulatedCalibrators& calibrators = options.calibrators;
  const auto n = static_cast<Eigen::Index>(calibrators.supernovae - calibrators.shared_hosts);
  Eigen::MatrixXd out = Eigen::MatrixXd::Constant(n, n, calibrators.common_error * calibrators.common_error);
  out.diagonal().array() += calibrators.modulus_error * calibrators.modulus_error;
  return out;
}

SupernovaTruth in_host(const SimulationOptions& options, const SimulatedHost& host, const SupernovaTruth& supernova) {
  SupernovaTruth truth = host.place;
  truth.s = supernova.s;
  truth.c = supernova.c;
  truth.t_0 = supernova.t_0;
  truth.intrinsic = supernova.intrinsic;
  truth.m_b = relation_magnitude(options.relation, truth) + truth.intrinsic;
  return truth;
}

}  // namespace thirdrung
