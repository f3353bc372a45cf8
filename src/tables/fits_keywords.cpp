#include "tables/fits_keywords.h"

#include <fmt/format.h>

#include <algorithm>
#include <array>
#include <cmath>
#include <set>

#include "tables/cells.h"
#include "tables/fits_handle.h"

namespace thirdrung {

namespace {

constexpr std::size_t kLongestKey = 48;  // leaves room on the card for the start of a text

std::string in_case(std::string_view text, bool upper) {
  std::string result(text);
  for (char& c : result) {
    if (upper && c >= 'a' && c <= 'z') c = static_cast<char>(c - 'a' + 'A');
    if (!upper && c >= 'A' && c <= 'Z') c = static_cast<char>(c - 'A' + 'a');
  }
  return result;
}

/// Keywords that describe the file itself rather than what is in it.
bool is_structure(const std::string& card) {
  const int kind = fits_get_keyclass(const_cast<char*>(card.c_str()));
  const std::string_view key = std::string_view(card).substr(0, 8);
  return (kind != TYP_USER_KEY && kind != TYP_WCS_KEY && kind != TYP_REFSYS_KEY) || key.starts_with("TCOMM") ||
         key.starts_with("LONGSTRN") || key.starts_with("DATE    ") || key.starts_with("TIMESYS ");
}

std::string header_key(const std::string& key) {
  std::string name = in_case(key, true);
  for (char& c : name) {
    const bool allowed = c > ' ' && c < 0x7F && c != '=' && c != '\'' && c != '/';
    if (!allowed) c = '_';
  }
  if (name.size() > kLongestKey) name.resize(kLongestKey);
  if (name.empty()) name.push_back('_');
  return is_structure(fmt::format("{:<8}= ", name)) ? "META_" + name : name;
}

void write_card(const FitsHandle& fits, const std::string& key, const std::string& value, const std::string& comment) {
  std::array<char, FLEN_CARD> card{};
  int status = 0;
  ffmkky(key.c_str(), const_cast<char*>(value.c_str()), comment.c_str(), card.data(), &status);
  fits_write_record(fits.get(), card.data(), &status);
  fits.check(status);
}

void write_text(const FitsHandle& fits, const std::string& key, const std::string& text, const std::string& comment) {
  int status = 0;
  fits_write_key_longstr(fits.get(), key.c_str(), text.c_str(), comment.c_str(), &status);
  fits.check(status);
}

void append_utf8(std::string& text, unsigned code) {
  const auto put = [&](unsigned byte) { text += static_cast<char>(static_cast<unsigned char>(byte)); };
  if (code < 0x80) {
    put(code);
  } else if (code < 0x800) {
    put(0xC0 | (code >> 6));
    put(0x80 | (code & 0x3F));
  } else if (code < 0x10000) {
    put(0xE0 | (code >> 12));
    put(0x80 | ((code >> 6) & 0x3F));
    put(0x80 | (code & 0x3F));
  } else {
    put(0xF0 | (code >> 18));
    put(0x80 | ((code >> 12) & 0x3F));
    put(0x80 | ((code >> 6) & 0x3F));
    put(0x80 | (code & 0x3F));
  }
}

/// Code point at the front of valid UTF-8, and its length in bytes.
std::pair<unsigned, std::size_t> first_code_point(std::string_view text) {
  const auto byte = [&](std::size_t i) { return static_cast<unsigned>(static_cast<unsigned char>(text[i])); };
  const unsigned first = byte(0);
  const std::size_t length = first < 0xC0 ? 1 : first < 0xE0 ? 2 : first < 0xF0 ? 3 : 4;
  if (length == 1 || text.size() < length) return {first, 1};
  unsigned code = first & (0xFFU >> (length + 1));
  for (std::size_t i = 1; i < length; ++i) code = (code << 6) | (byte(i) & 0x3F);
  return {code, length};
}

}  // namespace

std::string ascii_escaped(std::string_view text) {
  std::string result;
  for (std::size_t i = 0; i < text.size();) {
    const auto [code, length] = first_code_point(text.substr(i));
    const bool looks_escaped = code == '\\' && i + 1 < text.size() && (text[i + 1] == 'u' || text[i + 1] == 'U');
    if (code >= 0x20 && code < 0x7F && !looks_escaped) {
      result += static_cast<char>(code);
    } else {
      result += code < 0x10000 ? fmt::format("\\u{:04x}", code) : fmt::format("\\U{:08x}", code);
    }
    i += length;
  }
  return result;
}

std::string ascii_unescaped(std::string_view text) {
  std::string result;
  for (std::size_t i = 0; i < text.size();) {
    const bool marked = text[i] == '\\' && i + 1 < text.size() && (text[i + 1] == 'u' || text[i + 1] == 'U');
    const std::size_t digits = marked && text[i + 1] == 'U' ? 8 : 4;
    unsigned code = 0;
    bool valid = marked && i + 2 + digits <= text.size();
    for (std::size_t k = 0; valid && k < digits; ++k) {
      const std::size_t digit = std::string_view("0123456789abcdef").find(text[i + 2 + k]);
      valid = digit != std::string_view::npos;
      code = code * 16 + static_cast<unsigned>(digit & 0xF);
    }
    if (valid && code < 0x110000) {
      append_utf8(result, code);
      i += 2 + digits;
    } else {
      result += text[i++];
    }
  }
  return result;
}

void write_keyword(const FitsHandle& fits, const FitsKeyword& keyword) {
  const std::string key = header_key(keyword.key);
  const std::string comment = ascii_escaped(keyword.comment);
  if (const auto* text = std::get_if<std::string>(&keyword.value)) {
    write_text(fits, key, ascii_escaped(*text), comment);
  } else if (const auto* real = std::get_if<double>(&keyword.value)) {
    // FITS has no keyword value for "not a number".
    if (!std::isfinite(*real)) return write_text(fits, key, format_real(*real), comment);
    write_card(fits, key, in_case(format_real(*real), true), comment);
  } else if (const auto* integer = std::get_if<std::int64_t>(&keyword.value)) {
    write_card(fits, key, fmt::format("{}", *integer), comment);
  } else {
    write_card(fits, key, std::get<bool>(keyword.value) ? "T" : "F", comment);
  }
}

void write_column_comment(const FitsHandle& fits, int number, const std::string& text) {
  write_text(fits, fmt::format("TCOMM{}", number), ascii_escaped(text), "");
}

std::optional<std::string> read_keyword(const FitsHandle& fits, const std::string& key) {
  char* text = nullptr;
  int status = 0;
  fits_read_key_longstr(fits.get(), in_case(key, true).c_str(), &text, nullptr, &status);
  if (status == KEY_NO_EXIST || status == VALUE_UNDEFINED) {
    fits_clear_errmsg();
    return std::nullopt;
  }
  fits.check(status);
  std::string value = ascii_unescaped(text);
  fits_free_memory(text, &status);
  return value;
}

std::vector<std::pair<std::string, std::string>> read_keywords(const FitsHandle& fits) {
  std::vector<std::pair<std::string, std::string>> result;
  std::set<std::string> seen;
  int count = 0;
  int status = 0;
  fits_get_hdrspace(fits.get(), &count, nullptr, &status);
  fits.check(status);
  for (int i = 1; i <= count; ++i) {
    std::array<char, FLEN_CARD> card{};
    std::array<char, FLEN_KEYWORD> key{};
    int length = 0;
    fits_read_record(fits.get(), i, card.data(), &status);
    fits.check(status);
    if (is_structure(card.data())) continue;
    fits_get_keyname(card.data(), key.data(), &length, &status);
    fits.check(status);
    if (!seen.insert(key.data()).second) continue;
    result.emplace_back(in_case(key.data(), false), read_keyword(fits, key.data()).value_or(""));
  }
  return result;
}

}  // namespace thirdrung
