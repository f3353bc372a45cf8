#pragma once

#include <cstdint>
#include <string>
#include <string_view>
#include <utility>
#include <vector>

namespace thirdrung {

/// What an ECSV header says of one column.
struct EcsvColumn {
  enum class Kind { real, single, half, integer, flag, text };

  std::string name;
  std::string unit;
  std::string description;
  std::string datatype;  ///< As written, for error messages.
  Kind kind = Kind::text;
  std::int64_t smallest = 0;  ///< Range of an integer datatype.
  std::int64_t largest = 0;
};

/// Header of an ECSV 1.0 file (Astropy Proposal for Enhancement 6): the YAML document behind '#'.
struct EcsvHeader {
  std::vector<EcsvColumn> columns;
  char delimiter = ' ';
  /// Remarks in the order of the file; a value that is a list or a map is kept as YAML text.
  std::vector<std::pair<std::string, std::string>> meta;
  std::size_t length = 0;  ///< Bytes of the file before the line of column names.
  std::size_t lines = 0;   ///< Lines of the same.
};

/// True if the text opens with the mark of an ECSV file.
bool looks_like_ecsv(std::string_view text);

/// Reads the header at the front of `text`. Throws InputError for a missing or malformed one, for two columns of one
/// name, and for a datatype this program does not read (complex numbers, arrays in cells).
EcsvHeader parse_ecsv_header(std::string_view text, const std::string& file);

}  // namespace thirdrung
