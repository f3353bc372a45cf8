#include <catch2/catch.hpp>
#include <cmath>
#include <random>

#include "training/residual_summary.h"

namespace thirdrung::testing {
namespace {

/// Points of unit pulls, `offset` magnitudes too faint at z = 1, in proportion to z.
std::vector<HeldOutPoint> drawn(int supernovae, int epochs, double slope, unsigned seed) {
  std::mt19937_64 generator(seed);
  std::normal_distribution<double> normal;
  std::vector<HeldOutPoint> out;
  for (int k = 0; k < supernovae; ++k) {
    const double z = 0.01 + 0.4 * k / supernovae;
    for (int e = 0; e < epochs; ++e) {
      HeldOutPoint point;
      point.supernova = static_cast<std::size_t>(k);
      point.survey = "heron";
      point.passband = "blue";
      point.z = z;
      point.phase = -10 + 50.0 * e / epochs;
      point.pull = normal(generator);
      point.magnitude = 0.05 * point.pull + slope * z;
      point.weight = 1 / (0.05 * 0.05);
      out.push_back(point);
    }
  }
  return out;
}

std::vector<const HeldOutPoint*> pointers(const std::vector<HeldOutPoint>& points) {
  std::vector<const HeldOutPoint*> out;
  out.reserve(points.size());
  for (const HeldOutPoint& point : points) out.push_back(&point);
  return out;
}

}  // namespace

TEST_CASE("bins have the means and errors of their points") {
  const std::vector<HeldOutPoint> points = drawn(400, 5, 0, 1);
  const ResidualBin bin = summarise("all", pointers(points));
  CHECK(bin.points == 2000);
  CHECK(bin.supernovae == 400);
  // Independent points: 1/√2000 and 0.05/√2000; sampling error of the error itself 4%.
  CHECK(bin.mean_pull_error == Approx(1 / std::sqrt(2000.0)).epsilon(0.15));
  CHECK(bin.offset_error == Approx(0.05 / std::sqrt(2000.0)).epsilon(0.15));
  CHECK(std::abs(bin.mean_pull) < 4 * bin.mean_pull_error);
  CHECK(bin.chi2_per_dof == Approx(1).margin(0.15));
  CHECK(bin.chi2_per_dof_error == Approx(std::sqrt(2.0 / 2000)).epsilon(0.2));
  CHECK(bin.width == Approx(1).margin(0.1));
}

TEST_CASE("repeating every epoch of a supernova does not make the mean better known") {
  const std::vector<HeldOutPoint> once = drawn(200, 1, 0, 2);
  std::vector<HeldOutPoint> often;
  for (int k = 0; k < 10; ++k) often.insert(often.end(), once.begin(), once.end());
  const ResidualBin a = summarise("", pointers(once));
  const ResidualBin b = summarise("", pointers(often));
  CHECK(b.points == 10 * a.points);
  CHECK(b.mean_pull_error == Approx(a.mean_pull_error));
  CHECK(b.offset_error == Approx(a.offset_error));
}

TEST_CASE("a trend is found and named, and noise is not") {
  const std::vector<double> edges = {0, 0.1, 0.2, 0.3, 0.5};
  const auto redshift = [](const HeldOutPoint& p) { return p.z; };
  const auto quiet = bins_by(drawn(400, 5, 0, 3), redshift, edges, "");
  const auto loud = bins_by(drawn(400, 5, 0.05, 3), redshift, edges, "");
  REQUIRE(quiet.size() == 4);
  CHECK(std::abs(slope_of(quiet).value) < 3 * slope_of(quiet).error);
  CHECK(slope_of(loud).value == Approx(0.05).margin(3 * slope_of(loud).error));
  CHECK(slope_of(loud).value > 3 * slope_of(loud).error);
  CHECK(offset_sentence(quiet, "redshift").find("no mean residual") != std::string::npos);
  const std::string named = offset_sentence(loud, "redshift");
  CHECK(named.find("0.3 to 0.5") != std::string::npos);
  CHECK(named.find("0 to 0.1 ") == std::string::npos);
}

}  // namespace thirdrung::testing
