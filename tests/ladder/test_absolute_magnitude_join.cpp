#include <catch2/catch.hpp>

#include "ladder/absolute_magnitude_join.h"

using namespace thirdrung;

// Source: Riess et al. 2022, ApJL 934, L7: M_B = -19.253 +- 0.027, H0 = 73.04 +- 1.04, intercept 0.71416 in their
// notation a_B (the value that the two imply; the abstract and sect. 5.1 give the first two). Tolerance: the last digit
// of H0.
TEST_CASE("the join gives the published H0 from the published M_B and intercept", "[published]") {
  const HubbleConstant joined = join_absolute_magnitude(0.71416, 0.001, -19.253, 0.027);
  CHECK(joined.h0 == Approx(73.04).margin(0.01));
  // 0.2 x 0.027 mag and 0.001 in a_B are 1.26% of H0.
  CHECK(joined.error == Approx(0.926).margin(0.01));
  CHECK(joined.share_of_calibration == Approx(0.9669).margin(0.001));
}
