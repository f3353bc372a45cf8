#pragma once

#include "report/spec_parts.h"

namespace thirdrung {

/// Axes that several charts of residuals share.

inline const char* const residual_title = "residual (mag), brighter ↑";

bool has_residuals(const SupernovaRows& all);
/// Range of the residuals with their errors, both sides alike, so that the eye compares bright with faint.
Range residual_range(const SupernovaRows& all);
/// Logarithmic axis over the redshifts of the used supernovae, with round ticks.
Direction redshift_axis(const SupernovaRows& all);
/// Residuals upwards, brighter up.
Direction residual_axis(const Range& range);

}  // namespace thirdrung
