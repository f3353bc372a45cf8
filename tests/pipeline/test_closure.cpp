// Closure: surveys with a known intercept go through every step of an analysis, and the intercept comes back.
#include <catch2/catch.hpp>
#include <cmath>

#include "pipeline/closure_chain.h"
#include "simulation/small_survey.h"
#include "standardisation/deviates.h"
#include "template/gauged_template.h"

using namespace thirdrung;
using namespace thirdrung::testing;

namespace {

/// A survey like that of the demo: 120 supernovae out to 0.12.
SimulationOptions survey_like_the_demo(std::uint64_t seed) {
  SimulationOptions options = small_survey(120, seed);
  options.surveys[0].z_min = 0.015;
  options.surveys[0].z_max = 0.12;
  for (SurveyBand& band : options.surveys[0].bands) band.depth = 21.5;
  options.velocities.bulk_speed = 250;
  options.velocities.bulk_direction = {280, 10};
  options.velocities.bulk_tabulated = true;
  return options;
}

RedshiftOptions frames() {
  RedshiftOptions out;
  out.velocity = VelocitySource::column;
  return out;
}

}  // namespace

TEST_CASE("the intercept comes back from light curves", "[closure]") {
  const SpectralTemplate model = gauged_template();
  const PreparedTemplate prepared(model);
  Closure closure;
  for (std::uint64_t seed = 1; seed <= 10; ++seed) {
    const SimulationOptions options = survey_like_the_demo(seed);
    const SimulatedSample sample = simulate(options, model);
    const LightCurveFits fits =
        fit_all(sample.light_curves, sample.supernovae, prepared, sample.catalogue, Extinction());
    REQUIRE(fits.set_aside.empty());
    closure.add(intercept_of(data_of(fits.fits, sample.supernovae, frames()), options.velocities.sigma_v), sample.a_b);
  }
  INFO("mean offset " << closure.offset_sum / closure.count << ", mean error " << closure.error_sum / closure.count);
  // Four errors of the mean of ten.
  CHECK(std::abs(closure.mean_pull()) < 4 / std::sqrt(10.0));
  CHECK(closure.pull_width() < 2);
}

TEST_CASE("over many surveys the intercept has no bias and the error it states", "[closure]") {
  Closure closure;
  for (std::uint64_t seed = 1; seed <= 300; ++seed) {
    const SimulationOptions options = survey_like_the_demo(seed);
    const auto summaries = simulate_summaries(options);
    closure.add(intercept_of(data_of(summaries, frames()), options.velocities.sigma_v), options.relation.a_b());
  }
  INFO("mean offset " << closure.offset_sum / closure.count << ", mean error " << closure.error_sum / closure.count
                      << ", mean pull " << closure.mean_pull() << ", width " << closure.pull_width());
  // Three and a half errors of the mean and of the width of 300 normal deviates.
  CHECK(std::abs(closure.mean_pull()) < 3.5 / std::sqrt(300.0));
  CHECK(std::abs(closure.pull_width() - 1) < 3.5 / std::sqrt(600.0));
}

// A magnitude limit takes the faint half away from the far end of a survey: without correction the intercept is off by
// more than its error, with it the intercept comes back.
TEST_CASE("a magnitude limit biases the intercept, and the correction takes that back", "[closure]") {
  Closure plain, corrected;
  const MagnitudeLimit limit{18.6, 0.2};
  for (std::uint64_t seed = 1; seed <= 100; ++seed) {
    SimulationOptions options = survey_like_the_demo(seed);
    options.surveys[0].supernovae = 400;
    std::vector<SimulatedSummary> found;
    Deviates deviates(seed);
    for (const SimulatedSummary& one : simulate_summaries(options)) {
      if (one.truth.m_b + limit.width * deviates.normal() < limit.m_b) found.push_back(one);
    }
    const auto data = data_of(found, frames());
    plain.add(intercept_of(data, options.velocities.sigma_v), options.relation.a_b());
    corrected.add(intercept_of(data, options.velocities.sigma_v, {{options.surveys[0].name, limit}}),
                  options.relation.a_b());
  }
  INFO("mean offset " << plain.offset_sum / plain.count << " without, " << corrected.offset_sum / corrected.count
                      << " with the correction; mean error " << corrected.error_sum / corrected.count << ", mean pull "
                      << corrected.mean_pull() << ", width " << corrected.pull_width());
  CHECK(plain.mean_pull() > 1);
  CHECK(std::abs(corrected.mean_pull()) < 4 / std::sqrt(100.0));
  CHECK(corrected.pull_width() < 1.3);
}
