#pragma once

#include <filesystem>

#include "simulation/simulate.h"

namespace thirdrung {

/// Writes a simulated sample in the input formats of docs/formats.md:
///
///   passbands/catalogue.toml and a curve for every passband,
///   lightcurves/<survey>.ecsv and supernovae/<survey>.ecsv for every survey,
///   truth.ecsv: what is true of every supernova; its remarks say how it was made, with the true a_b.
///
/// Dates are written to 1e-4 d, fluxes to a thousandth of their errors or better, magnitudes to 1e-4. Files that are
/// there are replaced. Throws OutputError.
void write_simulation(const SimulatedSample& sample, const SimulationOptions& options,
                      const std::filesystem::path& folder);

}  // namespace thirdrung
