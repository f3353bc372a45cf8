#pragma once

#include <filesystem>
#include <string>
#include <vector>

namespace thirdrung {

/// A column of a FITS binary table that holds several numbers a row, one inner vector a row.
/// Throws InputError (naming file and column) if the file, the table or the column is missing or holds text.
std::vector<std::vector<double>> read_fits_vectors(const std::filesystem::path& path, const std::string& table,
                                                   const std::string& column);

}  // namespace thirdrung
