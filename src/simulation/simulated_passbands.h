#pragma once

#include "light/passband_catalogue.h"
#include "simulation/simulation_options.h"

namespace thirdrung {

/// The curve that the catalogue states: 1 between centre ± (width − edge)/2, falling as a raised cosine over `edge` to
/// 0 at centre ± (width + edge)/2, with a gentle slope of 6% over the width so that no two bands are copies.
Passband simulated_curve(const SimulatedPassband& passband);

/// All passbands as the catalogue states them (AB system), without the shifts that it does not know.
PassbandCatalogue simulated_catalogue(const SimulationOptions& options);

}  // namespace thirdrung
