#pragma once

#include <cstdint>
#include <string>
#include <vector>

#include "hubbleflow/scan_frame.h"

namespace thirdrung {

/// What a scan varies.
enum class ScanKind {
  z_min,       ///< values: the lower limits.
  z_max,       ///< values: the upper limits.
  z_grid,      ///< values x second_values: lower and upper limits together.
  surveys,     ///< Each survey left out, and each alone.
  sky_halves,  ///< count: directions of the pole, spread evenly over half the sky.
  host_mass,   ///< values[0]: log10 mass of the division (10).
  colour,      ///< values[0]: division (median).
  stretch,     ///< values[0]: division (median).
  date,        ///< values[0]: MJD of the division (median).
  dipole,      ///< A velocity of the sample fitted along.
  q0,          ///< q0 fitted along.
  jackknife,   ///< Every supernova left out in turn.
  bootstrap,   ///< count: draws; seed.
  robust       ///< Chauvenet's criterion and the Student-t likelihood.
};

/// One axis: one line of a run file.
struct ScanAxis {
  ScanKind kind = ScanKind::z_min;
  std::vector<double> values = {};         ///< Empty: the default of the kind.
  std::vector<double> second_values = {};  ///< z_max of the grid.
  std::size_t count = 0;                   ///< 0: the default of the kind (96 poles, 2000 draws).
  std::uint64_t seed = 1;
};

/// Name of a kind as tables and run files have it, and the way back (throws InputError naming the nearest kind).
std::string name_of(ScanKind kind);
ScanKind scan_kind(const std::string& name);

/// Every kind with its defaults: z_min 0.010 to 0.060 in steps of 0.005, z_max 0.06 to 0.20 in steps of 0.02, and their
/// grid.
std::vector<ScanAxis> default_axes();

/// The rows of one axis.
///
/// z axes: the other limit stays at the baseline's. surveys: "without X" drops every supernova X observed, "X alone"
/// keeps only those it alone observed or helped observe. Divisions: a row for each side within the baseline, and one
/// for their difference; what has no value is in neither, and the setting says how many that are. Everything is
/// compared in the joint covariance.
std::vector<ScanRow> run_scan(const ScanFrame& frame, const ScanAxis& axis, int threads = 0);

}  // namespace thirdrung
