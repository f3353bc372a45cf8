#include "tables/cells.h"

#include <fmt/format.h>

#include <algorithm>
#include <charconv>
#include <cmath>
#include <cstdlib>

namespace thirdrung {

namespace {

bool is_control(char c) {
  return static_cast<unsigned char>(c) < 0x20 || c == 0x7F;
}

/// std::from_chars knows no leading '+'.
std::string_view without_plus(std::string_view text) {
  if (text.size() > 1 && text[0] == '+' && text[1] != '-' && text[1] != '+') text.remove_prefix(1);
  return text;
}

}  // namespace

std::optional<double> parse_real(std::string_view text) {
  text = without_plus(text);
  const char* end = text.data() + text.size();
  double value = 0;
  const auto [stop, error] = std::from_chars(text.data(), end, value);
  if (stop != end || text.empty()) return std::nullopt;
  if (error == std::errc()) return value;
  if (error != std::errc::result_out_of_range) return std::nullopt;
  // Too small is as good as zero (or a denormal number); too large is no number.
  value = std::strtod(std::string(text).c_str(), nullptr);
  if (std::abs(value) < 1) return value;
  return std::nullopt;
}

std::optional<std::int64_t> parse_integer(std::string_view text) {
  text = without_plus(text);
  const char* end = text.data() + text.size();
  std::int64_t value = 0;
  const auto [stop, error] = std::from_chars(text.data(), end, value);
  if (text.empty() || stop != end || error != std::errc()) return std::nullopt;
  return value;
}

std::optional<bool> parse_flag(std::string_view text) {
  if (text == "True" || text == "true" || text == "TRUE" || text == "1") return true;
  if (text == "False" || text == "false" || text == "FALSE" || text == "0") return false;
  return std::nullopt;
}

std::string format_real(double value) {
  if (std::isnan(value)) return "nan";
  std::string text = fmt::format("{}", value);
  if (text.find_first_of(".einf") == std::string::npos) text += ".0";
  return text;
}

std::string_view trimmed(std::string_view text) {
  constexpr std::string_view blanks = " \t\r\n";
  const std::size_t first = text.find_first_not_of(blanks);
  if (first == std::string_view::npos) return {};
  return text.substr(first, text.find_last_not_of(blanks) - first + 1);
}

bool has_control_character(std::string_view text) {
  return std::any_of(text.begin(), text.end(), is_control);
}

std::string quoted_for_message(std::string_view text) {
  constexpr std::size_t longest = 40;
  std::string shown(text);
  if (shown.size() > longest) {
    std::size_t cut = longest;
    // Not in the middle of a UTF-8 sequence.
    while (cut > 0 && (static_cast<unsigned char>(shown[cut]) & 0xC0) == 0x80) --cut;
    shown.resize(cut);
    shown += "...";
  }
  std::replace_if(shown.begin(), shown.end(), is_control, ' ');
  return "\"" + shown + "\"";
}

}  // namespace thirdrung
