#pragma once

#include <filesystem>
#include <limits>
#include <string>
#include <vector>

#include "tables/table.h"

namespace thirdrung {

inline constexpr double missing_value = std::numeric_limits<double>::quiet_NaN();

/// One supernova as a survey's table gives it (docs/formats.md, "supernovae"). Absent numbers are NaN.
struct Supernova {
  std::string name;
  std::string survey;
  double ra = missing_value;       ///< ICRS [deg].
  double dec = missing_value;      ///< ICRS [deg].
  double z_helio = missing_value;  ///< Heliocentric redshift of the host.
  double z_helio_error = missing_value;
  double z_group = missing_value;  ///< Heliocentric redshift of the host's group, used instead where given.
  double v_pec = missing_value;    ///< Peculiar velocity [km/s], away from us positive, where given.
  double mw_ebv = missing_value;   ///< Milky Way reddening E(B−V) [mag].
  double mw_ebv_error = missing_value;
  double host_log_mass = missing_value;  ///< log10 of the stellar mass [solar masses].
  double host_log_mass_error = missing_value;
  double peak_mjd_guess = missing_value;  ///< [d].
  Place place;                            ///< Row it was read from, for messages.
};

/// A supernova that could not be used, with the reason in words.
struct SetAside {
  std::string supernova;
  std::string survey;
  std::string reason;
};

}  // namespace thirdrung
