// Closure: surveys with a known intercept go through every step of an analysis, and the intercept comes back.
#include <catch2/catch.hpp>
#include <cmath>

#include "pipeline/closure_chain.h"
#include "simulation/small_survey.h"
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
