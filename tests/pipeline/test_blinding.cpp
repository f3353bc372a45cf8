#include <catch2/catch.hpp>
#include <cmath>
#include <string>

#include "pipeline/blinding.h"

using namespace thirdrung;

TEST_CASE("the hidden offset is fixed by the phrase and spread evenly over its range") {
  CHECK(hidden_offset("a") == hidden_offset("a"));
  CHECK(hidden_offset("a") != hidden_offset("b"));
  double sum = 0, squares = 0;
  constexpr int count = 4000;
  for (int i = 0; i < count; ++i) {
    const double offset = hidden_offset("phrase " + std::to_string(i));
    REQUIRE(std::abs(offset) <= 0.02);
    sum += offset;
    squares += offset * offset;
  }
  // Even between -0.02 and 0.02: mean 0, deviation 0.02/sqrt(3); four errors of the mean, and of the mean square.
  CHECK(std::abs(sum / count) < 4 * 0.02 / std::sqrt(3.0 * count));
  CHECK(squares / count == Approx(0.0004 / 3).epsilon(4 * std::sqrt(0.8 / count)));
}

TEST_CASE("the hidden magnitude of calibrators is a constant of its own") {
  CHECK(hidden_magnitude("a") == hidden_magnitude("a"));
  double squares = 0, product = 0;
  constexpr int count = 4000;
  for (int i = 0; i < count; ++i) {
    const std::string phrase = "phrase " + std::to_string(i);
    const double magnitude = hidden_magnitude(phrase);
    REQUIRE(std::abs(magnitude) <= 0.1);
    squares += magnitude * magnitude / count;
    product += magnitude * hidden_offset(phrase) / count;
  }
  // As above; and it does not follow the offset in a_B, or the two could cancel in H0.
  CHECK(squares == Approx(0.01 / 3).epsilon(4 * std::sqrt(0.8 / count)));
  CHECK(std::abs(product) < 4 * 0.1 * 0.02 / 3 / std::sqrt(count));
}
