#pragma once

#include <filesystem>

#include "simulation/simulation_options.h"

namespace thirdrung {

/// Reads the TOML file that describes a simulation; docs/simulation.md lists its keys, which are the members of
/// SimulationOptions in the sections [relation], [population], [velocities], [milky_way], [[passband]] and [[survey]].
///
/// Throws InputError with file, line and key for anything that is not known, with the nearest key that is, and for what
/// check_simulation() refuses.
SimulationOptions read_simulation_file(const std::filesystem::path& path);

}  // namespace thirdrung
