#pragma once

#include "report/chart_spec.h"

namespace thirdrung {

/// Residuals on the equal-area map of the sky, bright and faint in two hues, the size telling how far from zero in
/// errors.
Chart residual_sky_chart(const ChartInput& input);

}  // namespace thirdrung
