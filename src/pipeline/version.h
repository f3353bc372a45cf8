#pragma once

#include <string>
#include <utility>
#include <vector>

namespace thirdrung {

/// "thirdrung 0.1.0".
std::string program_version();

/// Libraries with their versions, for the provenance.
std::vector<std::pair<std::string, std::string>> library_versions();

}  // namespace thirdrung
