#pragma once

#include <cstddef>
#include <vector>

#include "hubbleflow/scan_frame.h"

namespace thirdrung {

/// The half of the sky about a pole against the other half, within the baseline.
struct SkyHalf {
  double ra = 0.0, dec = 0.0;     ///< Of the pole, ICRS [deg].
  double l = 0.0, b = 0.0;        ///< The same, Galactic [deg].
  std::size_t near = 0, far = 0;  ///< Supernovae in the pole's half and in the other.
  double difference = 0.0;        ///< a_B of the pole's half minus the other's; NaN where either has too few.
  double error = 0.0;
};

/// The map of differences over the directions of the pole. The opposite pole has the opposite sign, so the poles cover
/// half the sky.
struct SkyHalvesMap {
  std::vector<SkyHalf> poles;
  double largest_pull = 0.0;  ///< Largest |difference| / error.
  std::size_t largest = 0;    ///< Its place in poles.
  double chance = 1.0;        ///< Probability of one as large somewhere on the map, correlations of the poles included.
};

/// Poles on a golden-angle spiral over the northern hemisphere. Throws InputError if a supernova of the baseline has no
/// position.
SkyHalvesMap sky_halves(const ScanFrame& frame, std::size_t poles, int threads = 0);

/// The map as scan rows: one for every pole, delta_ab the difference of the halves, coordinates {ra, dec}.
std::vector<ScanRow> sky_halves_rows(const ScanFrame& frame, const SkyHalvesMap& map);

}  // namespace thirdrung
