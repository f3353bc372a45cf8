#pragma once

#include <vector>

#include "sample/supernova.h"
#include "sky/dust_map.h"

namespace thirdrung {

/// Which supernovae take their Milky Way reddening from a sky map.
enum class ReddeningSource {
  table,          ///< None: mw_ebv of the table.
  map,            ///< All.
  table_then_map  ///< Those whose mw_ebv is missing.
};

struct SkyReddeningResult {
  std::size_t from_map = 0;         ///< How many took it from the map.
  std::vector<SetAside> set_aside;  ///< Supernovae left without any reddening; they are taken out of the list.
};

/// Fills mw_ebv from a sky map. `map` may be null for ReddeningSource::table. A reddening from the map has no error of
/// its own: mw_ebv_error becomes missing, and the overall uncertainty of the map is a matter for the error budget.
SkyReddeningResult apply_sky_reddening(std::vector<Supernova>& supernovae, ReddeningSource source, const DustMap* map);

}  // namespace thirdrung
