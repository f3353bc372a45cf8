#pragma once

#include <filesystem>
#include <string>

#include "pipeline/run_file.h"
#include "tables/table.h"

namespace thirdrung {

/// What the light-curve stage leaves.
struct LightCurveTables {
  Table fits;           ///< lightcurve-fits
  Table points;         ///< lightcurve-points
  Table curves;         ///< lightcurve-curves
  Table set_aside;      ///< set-aside: supernovae that could not be fitted or read, with the reason.
  Table error_factors;  ///< error-factors: what each passband's errors would have to be multiplied by.
};

/// Light curves fitted in one go before they are saved.
inline constexpr std::size_t lightcurves_a_chunk = 64;

/// Fits every light curve of the run. What is finished is saved in `chunks`, a folder, and read from there by a later
/// call with the same `key`: a run that was stopped goes on where it was, with the same bytes at the end.
///
/// Throws InputError for unreadable input, NoResultError if not one light curve could be fitted, Interrupted if asked
/// to stop.
LightCurveTables fit_light_curves(const RunFile& run, const std::filesystem::path& chunks, const std::string& key);

/// Removes what fit_light_curves saved.
void remove_chunks(const std::filesystem::path& chunks);

}  // namespace thirdrung
