#pragma once

#include "pipeline/run_file.h"
#include "tables/table.h"

namespace thirdrung {

/// Redshift in the CMB frame at which the velocity field is shown on the sky.
inline constexpr double field_redshift = 0.03;

/// The peculiar velocity that the run's model gives on an even grid of directions at field_redshift: ra, dec, v_pec.
/// No rows where velocities come from the supernova table, or are not corrected.
Table velocity_on_the_sky(const RunFile& run);

}  // namespace thirdrung
