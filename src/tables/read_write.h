#pragma once

#include <filesystem>

#include "tables/table.h"

namespace thirdrung {

/// Reads .ecsv, .csv, .fits or .fits.gz, told apart by content first and ending second.
/// Throws InputError for a missing, malformed or truncated file.
Table read_table(const std::filesystem::path& path);

/// Writes .ecsv, .csv, .fits or .fits.gz by the ending of the name, atomically. Throws OutputError.
void write_table(const Table& table, const std::filesystem::path& path);

}  // namespace thirdrung
