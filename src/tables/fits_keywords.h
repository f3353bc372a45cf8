#pragma once

#include <cstdint>
#include <optional>
#include <string>
#include <string_view>
#include <utility>
#include <variant>
#include <vector>

namespace thirdrung {

/// One keyword of a FITS header.
///
/// Keys are written in upper case and read in lower case; those of more than eight letters, or with letters beyond the
/// standard's, by the HIERARCH convention. Long texts go on in CONTINUE cards. FITS headers hold printable ASCII only:
/// any other letter is written as its code, \u00b5 for µ, and read back from it.
struct FitsKeyword {
  using Value = std::variant<std::string, double, std::int64_t, bool>;

  std::string key;
  Value value;
  std::string comment;
};

using FitsKeywords = std::vector<FitsKeyword>;

class FitsHandle;

/// Writes a keyword into the current HDU. A key that FITS keeps for itself (NAXIS, DATE...) gets "META_" before it.
void write_keyword(const FitsHandle& fits, const FitsKeyword& keyword);

/// Writes the description of a column, TCOMMn.
void write_column_comment(const FitsHandle& fits, int number, const std::string& text);

/// Value of a keyword of the current HDU as text ("T" and "F" for truth values), or nothing.
std::optional<std::string> read_keyword(const FitsHandle& fits, const std::string& key);

/// Key and value of every keyword of the current HDU that is not part of the structure of the file.
std::vector<std::pair<std::string, std::string>> read_keywords(const FitsHandle& fits);

/// The text in printable ASCII, other letters as \uXXXX; and back.
std::string ascii_escaped(std::string_view text);
std::string ascii_unescaped(std::string_view text);

}  // namespace thirdrung
