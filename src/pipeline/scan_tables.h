#pragma once

#include <vector>

#include "hubbleflow/scan_frame.h"
#include "tables/table.h"

namespace thirdrung {

/// One row a setting: scan, setting, supernovae, a_b, delta_ab with their errors, caution.
Table scans_table(const std::vector<ScanRow>& rows);

/// z_min, z_max, supernovae, delta_ab, delta_ab_error, caution, of rows whose coordinates are the two limits.
Table zrange_grid_table(const std::vector<ScanRow>& rows);

/// ra, dec, gal_l, gal_b of the pole, supernovae, delta_ab, delta_ab_error, caution, of rows whose coordinates are the
/// pole's ra and dec [deg]. The half about the opposite pole has the same difference with the other sign.
Table sky_halves_table(const std::vector<ScanRow>& rows);

}  // namespace thirdrung
