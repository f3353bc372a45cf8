#include <catch2/catch.hpp>
#include <cmath>

#include "standardisation/deviates.h"
#include "standardisation/selection.h"

using namespace thirdrung;

namespace {

StandardisationDatum datum(const std::string& survey, double modulus) {
  StandardisationDatum d;
  d.name = survey;
  d.surveys = {survey};
  d.m_b = 17.9;
  d.s = 1.1;
  d.c = 0.1;
  d.covariance = Eigen::Vector3d(0.0025, 0.0004, 0.0009).asDiagonal();
  d.modulus = modulus;
  d.flow_variance = 0.0025;
  return d;
}

constexpr StandardisationCoefficients relation{1.4, 3.0, 0.0, 0.1, -19.3};

}  // namespace

TEST_CASE("the bias of selection is the mean of those that were found") {
  Deviates deviates(5);
  const double scatter = 0.12 * 0.12, blur = 0.2 * 0.2;
  for (const double margin : {0.6, 0.1, -0.2, -0.5}) {
    double sum = 0, squares = 0, found = 0;
    for (int i = 0; i < 400000; ++i) {
      const double departure = 0.12 * deviates.normal();
      if (departure + 0.2 * deviates.normal() >= margin) continue;
      sum += departure;
      squares += departure * departure;
      ++found;
    }
    const double mean = sum / found, error = std::sqrt((squares / found - mean * mean) / found);
    INFO("margin " << margin);
    CHECK(selection_bias(scatter, blur, margin) == Approx(mean).margin(4 * error));
    const double variance = squares / found - mean * mean;
    CHECK(scatter - selection_variance_loss(scatter, blur, margin) ==
          Approx(variance).margin(4 * variance * std::sqrt(2.0 / found)));
  }
}

TEST_CASE("the bias far from the limit") {
  CHECK(selection_bias(0.01, 0.0, 10.0) == Approx(0.0).margin(1e-15));
  // Cut by a sharp limit far below the mean, all stand just below it.
  CHECK(selection_bias(0.01, 0.0, -20.0) == Approx(-20.0).epsilon(1e-3));
  // No step where the two formulas meet, at ten standard deviations.
  const double near = selection_bias(1.0, 0.0, -10.0 + 1e-9), far = selection_bias(1.0, 0.0, -10.0 - 1e-9);
  CHECK(near == Approx(far).epsilon(1e-6));
}

TEST_CASE("the bias of a supernova comes from its own stretch, colour and limits") {
  const MagnitudeLimits limits = {{"north", {18.0, 0.15}}, {"deep", {19.0, 0.15}}};
  // Expected at -19.3 - 1.4 * 0.1 + 3 * 0.1 + 37 = 17.86.
  std::vector<StandardisationDatum> data = {datum("north", 37), datum("deep", 37), datum("open", 37),
                                            datum("north", 37), datum("north", 37)};
  data[3].surveys = {"north", "deep"};
  data[4].surveys = {"north", "open"};
  const Eigen::VectorXd bias = selection_biases(data, relation, {}, limits);
  const double blur = 0.15 * 0.15 + 1.4 * 1.4 * 0.0004 + 9 * 0.0009;
  CHECK(bias[0] == Approx(selection_bias(0.01 + 0.0025, blur, 18.0 - 17.86)));
  CHECK(bias[0] < -0.02);
  CHECK(bias[1] > -1e-6);
  CHECK(bias[2] == 0.0);
  CHECK(bias[3] == bias[1]);
  CHECK(bias[4] == 0.0);
  const auto plain = standardise(data, relation, {});
  const auto corrected = standardise_selected(data, relation, {}, limits);
  CHECK(corrected[0].magnitude == Approx(plain[0].magnitude - bias[0]));
  CHECK(corrected[0].selection_bias == bias[0]);
  CHECK(corrected[2].magnitude == plain[2].magnitude);
}
