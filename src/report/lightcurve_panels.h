#pragma once

#include <filesystem>
#include <string>
#include <vector>

#include "report/supernova_rows.h"

namespace thirdrung {

/// Light curves of the supernovae as JSON text, one a supernova in the order of the rows, "" where there is none.
///
/// {"b": [{"n": band, "p": phases, "t": mjd, "f": flux, "e": errors, "m": model at the points, "u": pulls, "x": indices
/// of the mistrusted points, "cp": [first phase, step] or phases, "cf": model flux, "ce": model error}, ...]}; fluxes
/// in uJy, four significant digits. Bands in the order of their first point. Reads lightcurve-points.ecsv and
/// lightcurve-curves.ecsv of the folder, one after the other.
std::vector<std::string> lightcurve_panels(const std::filesystem::path& folder, const SupernovaRows& all);

}  // namespace thirdrung
