#pragma once

#include <filesystem>
#include <string>

#include "base/error.h"

namespace thirdrung {

/// A file that the run file names.
struct InputFile {
  std::filesystem::path path;  ///< Ready to open.
  std::string written;         ///< As the run file has it, for messages and the provenance.
  Place place;                 ///< Where the run file names it.

  bool given() const { return !path.empty(); }
};

/// Throws InputError at the place that names it, unless the file (or folder) is there.
void require_exists(const InputFile& file);

}  // namespace thirdrung
