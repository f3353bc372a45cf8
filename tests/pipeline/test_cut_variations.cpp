#include <catch2/catch.hpp>

#include "pipeline/cut_variations.h"

using namespace thirdrung;

TEST_CASE("every numeric rule is varied both ways, that on host masses turned round, and the others stay") {
  CutLimits limits;
  limits.mw_ebv_max.reset();
  const auto variations = cut_variations(limits);
  bool tighter_colour = false, looser_colour = false;
  for (const CutVariation& one : variations) {
    CHECK(one.limits.z_min == limits.z_min);
    CHECK_FALSE(one.limits.mw_ebv_max);
    if (one.setting == "|c| < 0.2 (tighter)") {
      tighter_colour = true;
      CHECK(one.limits.s_min == limits.s_min);
    }
    if (one.setting == "|c| < 0.4 (looser)") looser_colour = true;
  }
  CHECK(tighter_colour);
  CHECK(looser_colour);
  CHECK(variations.size() % 2 == 1);
  CHECK(variations.back().limits.host_mass);
  CHECK(variations.back().setting == "hosts with a mass alone (tighter)");
}
