#pragma once

#include <catch2/catch.hpp>
#include <cstdlib>
#include <filesystem>
#include <optional>

namespace thirdrung::testing {

/// Folder of published measurements: THIRDRUNG_REAL_DATA, or shared/data beside the checkout; nothing where absent.
inline std::optional<std::filesystem::path> real_data_folder() {
  namespace fs = std::filesystem;
  if (const char* named = std::getenv("THIRDRUNG_REAL_DATA")) {
    if (fs::is_directory(named)) return fs::path(named);
    return std::nullopt;
  }
  const fs::path beside = fs::path(THIRDRUNG_SOURCE_DIR) / ".." / "shared" / "data";
  if (fs::is_directory(beside)) return fs::weakly_canonical(beside);
  return std::nullopt;
}

}  // namespace thirdrung::testing

/// Leaves a [realdata] test with a message where the data are absent.
#define THIRDRUNG_NEEDS_REAL_DATA(folder)                                         \
  const auto folder##_found = thirdrung::testing::real_data_folder();             \
  if (!folder##_found) {                                                          \
    WARN("skipped: no published data (set THIRDRUNG_REAL_DATA to their folder)"); \
    return;                                                                       \
  }                                                                               \
  const std::filesystem::path& folder = *folder##_found
