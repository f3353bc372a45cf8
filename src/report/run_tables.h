#pragma once

#include <filesystem>
#include <limits>
#include <map>
#include <optional>
#include <string>
#include <vector>

#include "tables/table.h"

namespace thirdrung {

/// A number with its error; NaN where the run does not give it.
struct Measured {
  double value = std::numeric_limits<double>::quiet_NaN();
  double error = std::numeric_limits<double>::quiet_NaN();
};

/// One quality rule and how many supernovae it removed.
struct CutLine {
  std::string rule;
  long long removed_alone = 0;     ///< How many it would remove if it were the only rule.
  long long removed_in_order = 0;  ///< How many of those that the rules before it had left.
  long long left = 0;              ///< How many are left after it.
};

/// The content of summary.json, and of the small tables that say the same in more detail.
struct RunSummary {
  Measured intercept;  ///< a_B with its whole error.
  double error_stat = std::numeric_limits<double>::quiet_NaN();
  double error_sys = std::numeric_limits<double>::quiet_NaN();
  bool blind = false;
  Measured hubble_constant;              ///< Only where the run joined a calibrated M_B, or calibrators [km/s/Mpc].
  Measured absolute_magnitude;           ///< M_B [mag], and
  std::optional<long long> calibrators;  ///< how many supernovae it is from, where it is from calibrators.
  std::optional<long long> supernovae;
  double scatter_mag = std::numeric_limits<double>::quiet_NaN();
  double z_min = std::numeric_limits<double>::quiet_NaN();
  double z_max = std::numeric_limits<double>::quiet_NaN();
  /// alpha, beta, gamma, sigma_int, s_mean, s_width, c_mean, c_width, where given.
  std::map<std::string, Measured> parameters;
  std::vector<CutLine> cuts;
  std::vector<std::string> warnings;
  std::vector<std::pair<std::string, std::string>> inputs;  ///< File and its SHA-256.
  std::string version;
  std::vector<std::string> files;

  Measured parameter(const std::string& name) const;
};

/// Everything the report draws on: the result tables that a run left in its output folder.
///
/// Each is optional, since a run may stop after any stage. The light-curve points and curves, by far the largest, are
/// not kept here: lightcurve_panels.h reads them one after the other.
struct RunTables {
  std::filesystem::path folder;
  RunSummary summary;
  std::optional<Table> fits, sample, standardised, zrange_grid, sky_halves, scans, budget, calibration_derivatives,
      influence, fields, join, calibrators;
};

/// Reads what is there. Throws InputError if the folder holds none of the result tables, or if one is malformed.
RunTables read_run_tables(const std::filesystem::path& folder);

/// The table `name`.ecsv of a folder, if it is there and has rows.
std::optional<Table> read_result_table(const std::filesystem::path& folder, const std::string& name);

/// Column of reals, or NaN for every row where the table lacks it.
std::vector<double> reals_or_missing(const Table& table, const std::string& name);
/// Column of text, or "" for every row where the table lacks it.
std::vector<std::string> strings_or_empty(const Table& table, const std::string& name);
/// Column of flags, or `otherwise` for every row where the table lacks it.
std::vector<bool> flags_or(const Table& table, const std::string& name, bool otherwise);

}  // namespace thirdrung
