#include <catch2/catch.hpp>
#include <cmath>

#include "training/error_factors.h"
#include "training/restricted_likelihood.h"
#include "training/small_training.h"

namespace thirdrung::testing {
namespace {

/// Multiplies the errors of one passband of one survey.
void scale_errors(std::vector<TrainingSupernova>& supernovae, const std::string& survey, const std::string& passband,
                  double factor) {
  for (TrainingSupernova& sn : supernovae) {
    if (sn.survey != survey) continue;
    for (const TrainingBand& band : sn.bands) {
      if (band.passband != passband) continue;
      for (std::size_t e = band.begin; e < band.end; ++e) sn.epochs[e].flux_error *= factor;
    }
  }
}

SimulatedTraining many_supernovae() {
  SimulatedTrainingOptions how;
  how.supernovae = 120;
  how.noise = 0.02;
  how.seed = 5;
  return simulated_training(how);
}

}  // namespace

TEST_CASE("factors on measured errors are where the restricted likelihood, from full matrices, is stationary") {
  SimulatedTrainingOptions how;
  how.supernovae = 12;
  const SimulatedTraining simulated = simulated_training(how);
  PreparedTraining set = prepared(simulated);
  scale_errors(set.supernovae, "heron", "blue", 0.7);
  const UnknownsPrior prior;
  ScatterOptions options;
  options.iterations = 100;
  const std::vector<ErrorFactor> factors =
      error_factors(simulated.truth, set.supernovae, set.unknowns, prior, TemplateScatter::held, options, 1);
  REQUIRE(factors.size() == 9);
  for (const ErrorFactor& f : factors) scale_errors(set.supernovae, f.survey, f.passband, f.factor);
  const double step = 1e-3;
  for (const ErrorFactor& f : factors) {
    const auto at = [&](double d) {
      PreparedTraining moved = set;
      scale_errors(moved.supernovae, f.survey, f.passband, std::exp(d));
      const double off = (std::log(f.factor) + d) / options.factor_width;
      return restricted_log_likelihood(simulated.truth, moved, prior, options) - 0.5 * off * off;
    };
    const double up = at(step) - at(0);
    const double down = at(-step) - at(0);
    const double slope = (up - down) / (2 * step);
    const double curvature = -(up + down) / (step * step);
    CHECK(std::abs(slope) / std::sqrt(curvature) < 0.03);
    // The error given is that of the expected curvature; a dozen supernovae leave a third between the two.
    CHECK(f.error / f.factor == Approx(1 / std::sqrt(curvature)).epsilon(0.33));
  }
}

TEST_CASE("errors stated too small are found out, and the scatter beside them is not changed by it") {
  const SimulatedTraining simulated = many_supernovae();
  PreparedTraining set = prepared(simulated);
  scale_errors(set.supernovae, "heron", "blue", 1 / 1.5);
  for (const TemplateScatter scatter : {TemplateScatter::estimated_along, TemplateScatter::held}) {
    const std::vector<ErrorFactor> factors =
        error_factors(simulated.truth, set.supernovae, set.unknowns, {}, scatter, {}, 1);
    for (const ErrorFactor& f : factors) {
      const bool scaled = f.survey == "heron" && f.passband == "blue";
      const double truth = scaled ? 1.5 : 1.0;
      CHECK(f.error < 0.1 * truth);
      CHECK(std::abs(f.factor - truth) < 3.5 * f.error);
      if (scaled) CHECK(f.supernovae == 60);
    }
  }
  const auto alone =
      error_factors(simulated.truth, set.supernovae, set.unknowns, {}, TemplateScatter::estimated_along, {}, 1);
  const auto together =
      error_factors(simulated.truth, set.supernovae, set.unknowns, {}, TemplateScatter::estimated_along, {}, 2);
  for (std::size_t b = 0; b < alone.size(); ++b) CHECK(alone[b].factor == together[b].factor);
}

TEST_CASE("wild epochs do not count as errors stated too small, and errors far too small are not called wild") {
  const SimulatedTraining simulated = many_supernovae();
  const PreparedTraining prepared_set = prepared(simulated);
  FittedSet set{prepared_set.supernovae, prepared_set.unknowns};
  scale_errors(set.supernovae, "heron", "blue", 1 / 2.5);
  for (std::size_t k = 0; k < set.supernovae.size(); k += 4) {
    TrainingEpoch& wild = set.supernovae[k].epochs[set.supernovae[k].bands.back().begin + 2];
    wild.flux += 25 * wild.flux_error;
  }
  for (const ErrorFactor& f : error_factors_of_fits(simulated.truth, set, 2)) {
    INFO(f.survey << " " << f.passband << " " << f.factor << " " << f.error);
    const double truth = f.survey == "heron" && f.passband == "blue" ? 2.5 : 1.0;
    CHECK(std::abs(f.factor - truth) < 3.5 * f.error);
    CHECK(f.error < 0.1 * truth);
  }
}

TEST_CASE("factors on errors are found with a template that states no scatter") {
  SimulatedTrainingOptions how;
  how.supernovae = 60;
  how.scatter = false;
  const SimulatedTraining simulated = simulated_training(how);
  const PreparedTraining set = prepared(simulated);
  SpectralTemplate model = simulated.truth;
  model.log_epoch_scatter.resize(0, 0);
  model.log_colour_scatter.resize(0);
  const auto factors = error_factors_of_fits(model, {set.supernovae, set.unknowns}, 1);
  CHECK(factors.size() == 9);
  for (const ErrorFactor& f : factors) CHECK(std::abs(f.factor - 1) < 3.5 * f.error);
  CHECK(error_factors_of_fits(model, {}, 1).empty());
}

}  // namespace thirdrung::testing
