#include "sample/sky_reddening.h"

#include <cmath>
#include <stdexcept>

namespace thirdrung {

SkyReddeningResult apply_sky_reddening(std::vector<Supernova>& supernovae, ReddeningSource source, const DustMap* map) {
  if (source != ReddeningSource::table && map == nullptr) throw std::logic_error("a sky reddening needs a dust map");
  SkyReddeningResult result;
  std::vector<Supernova> kept;
  kept.reserve(supernovae.size());
  for (Supernova& s : supernovae) {
    const bool asked =
        source == ReddeningSource::map || (source == ReddeningSource::table_then_map && std::isnan(s.mw_ebv));
    if (asked) {
      s.mw_ebv = map->ebv(s.ra, s.dec).value_or(missing_value);
      s.mw_ebv_error = missing_value;
      if (!std::isnan(s.mw_ebv)) ++result.from_map;
    }
    if (std::isnan(s.mw_ebv)) {
      result.set_aside.push_back(
          {s.name, s.survey, asked ? "the dust map has no value here" : "mw_ebv is missing and no dust map is named"});
    } else {
      kept.push_back(std::move(s));
    }
  }
  supernovae = std::move(kept);
  return result;
}

}  // namespace thirdrung
