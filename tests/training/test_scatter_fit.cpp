#include <catch2/catch.hpp>
#include <cmath>

#include "training/restricted_likelihood.h"
#include "training/scatter_fit.h"
#include "training/small_training.h"

namespace thirdrung::testing {

TEST_CASE("the scatter is where the restricted likelihood, from full matrices, is stationary") {
  SimulatedTrainingOptions how;
  how.supernovae = 12;
  const SimulatedTraining simulated = simulated_training(how);
  const PreparedTraining set = prepared(simulated);
  SpectralTemplate model = simulated.truth;
  model.log_epoch_scatter.setConstant(std::log(0.05));
  model.log_colour_scatter.setConstant(std::log(0.05));
  const UnknownsPrior prior;
  ScatterOptions options;
  options.iterations = 100;
  const double reached = fit_scatter(model, set.supernovae, set.unknowns, prior, options, 1);
  const double expected = restricted_log_likelihood(model, set, prior, options);
  CHECK(reached == Approx(expected).epsilon(1e-9));
  const double step = 1e-3;
  double largest = 0;
  for (Eigen::Index i = 0; i < model.log_epoch_scatter.size() + model.log_colour_scatter.size(); ++i) {
    const auto at = [&](double d) {
      SpectralTemplate moved = model;
      const Eigen::Index epochs = model.log_epoch_scatter.size();
      (i < epochs ? moved.log_epoch_scatter.data()[i] : moved.log_colour_scatter(i - epochs)) += d;
      return restricted_log_likelihood(moved, set, prior, options);
    };
    const double up = at(step) - expected;
    const double down = at(-step) - expected;
    const double slope = (up - down) / (2 * step);
    const double curvature = -(up + down) / (step * step);
    CHECK(curvature > 0);
    // Distance to the maximum in units of its width; the search stops when the likelihood gains less than 1e-4.
    largest = std::max(largest, std::abs(slope) / std::sqrt(curvature));
  }
  CHECK(largest < 0.03);
}

TEST_CASE("scatter that was put in comes back") {
  SimulatedTrainingOptions how;
  how.supernovae = 120;
  how.noise = 0.005;
  how.seed = 3;
  SimulatedTraining simulated = simulated_training(how);
  const PreparedTraining set = prepared(simulated);
  SpectralTemplate model = simulated.truth;
  model.log_epoch_scatter.setConstant(std::log(0.07));
  model.log_colour_scatter.setConstant(std::log(0.005));
  fit_scatter(model, set.supernovae, set.unknowns, {}, {}, 1);
  // 5544 epochs over 81 nodes and 540 bands over 9: sampling errors of a node are near 6% (ε) and 10% (κ, of which four
  // combinations a supernova go into its unknowns). Bounds: four of these, away from the ends that have few data.
  for (const double p : {-8.0, 0.0, 12.0, 25.0}) {
    for (const double w : {4400.0, 5200.0, 6000.0, 6800.0})
      CHECK(model.epoch_scatter(p, w) == Approx(0.02).epsilon(0.25));
  }
  for (const double w : {4400.0, 5000.0, 5700.0, 6500.0}) CHECK(model.colour_scatter(w) == Approx(0.02).epsilon(0.4));
}

}  // namespace thirdrung::testing
