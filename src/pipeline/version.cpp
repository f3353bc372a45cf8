#include "pipeline/version.h"

#include <fmt/format.h>
#include <toml++/toml.h>

#include <Eigen/Core>
#include <nlohmann/json.hpp>

namespace thirdrung {

std::string program_version() {
  return std::string("thirdrung ") + THIRDRUNG_VERSION;
}

std::vector<std::pair<std::string, std::string>> library_versions() {
  return {{"Eigen", fmt::format("{}.{}.{}", EIGEN_WORLD_VERSION, EIGEN_MAJOR_VERSION, EIGEN_MINOR_VERSION)},
          {"fmt", fmt::format("{}.{}.{}", FMT_VERSION / 10000, FMT_VERSION / 100 % 100, FMT_VERSION % 100)},
          {"toml++", fmt::format("{}.{}.{}", TOML_LIB_MAJOR, TOML_LIB_MINOR, TOML_LIB_PATCH)},
          {"nlohmann-json", fmt::format("{}.{}.{}", NLOHMANN_JSON_VERSION_MAJOR, NLOHMANN_JSON_VERSION_MINOR,
                                        NLOHMANN_JSON_VERSION_PATCH)},
          {"compiler", __VERSION__}};
}

}  // namespace thirdrung
