#include <catch2/catch.hpp>
#include <cmath>

#include "training/penalties.h"
#include "training/small_training.h"
#include "training/time_scale.h"

namespace thirdrung::testing {

// A template moved along the time scale gives the same light curves at the stretches that go with it, up to the square
// of s − 1. Bound: a tenth of what it does at unchanged stretches.
TEST_CASE("a template moved along the time scale gives the same light curves") {
  const SpectralTemplate model = true_template(two_catalogues());
  const TimeScale scale = time_scale(model);
  const CoefficientLayout layout(model);
  const double h = 0.01;
  SpectralTemplate moved = model;
  layout.scatter(layout.gather(model) + h * scale.direction, moved);
  // In the gauge but for what Γ at maximum does to the weights of K within B and V, and for the square of h.
  CHECK((gauge_conditions(model).gradient.transpose() * scale.direction).cwiseAbs().maxCoeff() < 0.02);
  CHECK(gauge_conditions(moved).value.cwiseAbs().maxCoeff() < 0.002);
  double same_s = 0;
  double own_s = 0;
  for (const double s : {0.9, 1.0, 1.1}) {
    const double renamed = 1 + (s * (1 - h) - 1) * (1 - h * (scale.growth - 1));
    for (double p = -10; p <= 30; p += 2) {
      for (double wavelength = 3800; wavelength <= 8000; wavelength += 300) {
        const double before = std::log(model.flux(p, wavelength, s, 0.1));
        same_s = std::max(same_s, std::abs(std::log(moved.flux(p, wavelength, s, 0.1)) - before));
        own_s = std::max(own_s, std::abs(std::log(moved.flux(p, wavelength, renamed, 0.1)) - before));
      }
    }
  }
  CAPTURE(same_s, own_s, scale.growth);
  CHECK(same_s > 0.01);
  CHECK(own_s < 0.1 * same_s);
}

}  // namespace thirdrung::testing
