#include <fmt/format.h>

#include <iterator>
#include <stdexcept>

#include "tables/cells.h"
#include "tables/delimited.h"
#include "tables/ecsv.h"

namespace thirdrung {

namespace {

const char* datatype_of(const Column& column) {
  if (std::holds_alternative<Column::Reals>(column.values)) return "float64";
  if (std::holds_alternative<Column::Integers>(column.values)) return "int64";
  if (std::holds_alternative<Column::Flags>(column.values)) return "bool";
  return "string";
}

/// A text as a YAML scalar in double quotes, on one line whatever it holds.
std::string yaml_quoted(std::string_view text) {
  std::string result = "\"";
  for (const char c : text) {
    const auto byte = static_cast<unsigned char>(c);
    if (c == '"' || c == '\\') {
      result += '\\';
      result += c;
    } else if (c == '\n') {
      result += "\\n";
    } else if (byte < 0x20 || byte == 0x7F) {
      result += fmt::format("\\x{:02x}", byte);
    } else {
      result += c;
    }
  }
  return result + '"';
}

/// Plain where YAML lets a word stand plain beyond doubt, else quoted.
std::string yaml_word(std::string_view text) {
  constexpr std::string_view letters = "abcdefghijklmnopqrstuvwxyzABCDEFGHIJKLMNOPQRSTUVWXYZ_";
  constexpr std::string_view more = "abcdefghijklmnopqrstuvwxyzABCDEFGHIJKLMNOPQRSTUVWXYZ_0123456789 /().";
  const bool plain = !text.empty() && letters.find(text.front()) != std::string_view::npos && text.back() != ' ' &&
                     text.find_first_not_of(more) == std::string_view::npos;
  // Words that YAML 1.1 takes for truth values or nothing.
  for (const char* word : {"y", "n", "yes", "no", "on", "off", "true", "false", "null"}) {
    std::string lower(text);
    for (char& c : lower) c = c >= 'A' && c <= 'Z' ? static_cast<char>(c - 'A' + 'a') : c;
    if (lower == word) return yaml_quoted(text);
  }
  return plain ? std::string(text) : yaml_quoted(text);
}

std::string header_of(const Table& table, char delimiter) {
  std::string text = "# %ECSV 1.0\n# ---\n# datatype:\n";
  for (const Column& column : table.columns()) {
    text += fmt::format("# - {{name: {}", yaml_word(column.name));
    if (!column.unit.empty()) text += fmt::format(", unit: {}", yaml_word(column.unit));
    text += fmt::format(", datatype: {}", datatype_of(column));
    if (!column.description.empty()) text += fmt::format(", description: {}", yaml_quoted(column.description));
    text += "}\n";
  }
  if (delimiter != ' ') text += fmt::format("# delimiter: '{}'\n", delimiter);
  if (!table.meta().empty()) {
    text += "# meta: !!omap\n";
    for (const auto& [key, value] : table.meta())
      text += fmt::format("# - {}: {}\n", yaml_word(key), yaml_quoted(value));
  }
  text += "# schema: astropy-2.0\n";
  return text;
}

void append_cell(std::string& text, const Column& column, std::size_t row, char delimiter) {
  if (column.is_missing(row)) return append_field(text, "", delimiter, delimiter == ' ');
  if (const auto* reals = std::get_if<Column::Reals>(&column.values)) {
    text += format_real((*reals)[row]);
  } else if (const auto* integers = std::get_if<Column::Integers>(&column.values)) {
    fmt::format_to(std::back_inserter(text), "{}", (*integers)[row]);
  } else if (const auto* flags = std::get_if<Column::Flags>(&column.values)) {
    text += (*flags)[row] ? "True" : "False";
  } else {
    append_field(text, std::get<Column::Strings>(column.values)[row], delimiter, true);
  }
}

}  // namespace

std::string format_ecsv(const Table& table, char delimiter) {
  if (delimiter != ',' && delimiter != ' ') throw std::logic_error("ECSV is delimited by ',' or ' '");
  if (table.columns().empty()) throw std::logic_error("a table without columns cannot be written");
  std::string text = header_of(table, delimiter);
  bool first = true;
  for (const Column& column : table.columns()) {
    if (!first) text += delimiter;
    append_field(text, column.name, delimiter, true);
    first = false;
  }
  text += '\n';
  for (std::size_t row = 0; row < table.rows(); ++row) {
    const std::size_t start = text.size();
    for (const Column& column : table.columns()) {
      if (&column != &table.columns().front()) text += delimiter;
      append_cell(text, column, row, delimiter);
    }
    // A table of one column with a missing value: a blank line would be passed over on reading.
    if (text.size() == start) text += "\"\"";
    text += '\n';
  }
  return text;
}

}  // namespace thirdrung
