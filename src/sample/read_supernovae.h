#pragma once

#include <string>
#include <vector>

#include "sample/supernova.h"
#include "tables/table.h"

namespace thirdrung {

/// Supernovae of a survey's table, and those of its rows that cannot be used.
struct SupernovaList {
  std::vector<Supernova> supernovae;  ///< In the order of the table.
  std::vector<SetAside> set_aside;    ///< In the order of the table; the reason names the row and the column.
};

/// Reads a table of supernovae (docs/formats.md).
///
/// Needed: supernova (text), ra and dec (deg, ICRS), z_helio. Used where present: z_helio_error, z_group, v_pec (a
/// velocity), mw_ebv and mw_ebv_error (mag), host_log_mass and host_log_mass_error (dex), peak_mjd_guess (d).
///
/// A fault of the table as a whole (a column missing, a wrong unit, text where numbers belong, no rows) throws
/// InputError. A fault of one row sets that supernova aside, and the rest goes on: no name, named twice (the first row
/// is kept), no position or an impossible one, no redshift, a redshift ≤ 0 or > 3, a negative error, a negative
/// reddening, or one above 10 mag, a peculiar velocity above 5000 km/s, a host mass outside 10⁴ to 10¹⁴ solar masses.
SupernovaList read_supernovae(const Table& table, const std::string& survey);

}  // namespace thirdrung
