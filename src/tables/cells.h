#pragma once

#include <cstdint>
#include <optional>
#include <string>
#include <string_view>

namespace thirdrung {

// Numbers and truth values as text, the way tables hold them: always with '.', whatever the locale.

/// A real number ("1.5", "+2e-3", "nan", "-inf"); nothing if the text is anything else, or too large for a double.
std::optional<double> parse_real(std::string_view text);

/// A whole number; nothing if the text is anything else, or outside the 64-bit range.
std::optional<std::int64_t> parse_integer(std::string_view text);

/// "True" or "False", also in lower or upper case, or "1" or "0".
std::optional<bool> parse_flag(std::string_view text);

/// The shortest text that reads back as the same double ("0.1", "1.0", "1e-05", "nan", "inf").
std::string format_real(double value);

/// `text` without blanks at its ends.
std::string_view trimmed(std::string_view text);

/// True if the text holds a line break, a tab or another control character: no name should.
bool has_control_character(std::string_view text);

/// `text` shortened for an error message, with line breaks and other control characters shown as blanks.
std::string quoted_for_message(std::string_view text);

}  // namespace thirdrung
