#pragma once

#include "report/chart_spec.h"

namespace thirdrung {

/// Residuals on the equal-area map of the sky, bright and faint in two hues, the size telling how far from zero in
/// errors.
Chart residual_sky_chart(const ChartInput& input);

/// Difference of a_B between the two halves of the sky, over directions of the pole.
/// @param input with the table sky_halves.
Chart sky_halves_chart(const ChartInput& input);

}  // namespace thirdrung
