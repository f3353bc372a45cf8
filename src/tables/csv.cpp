#include "tables/csv.h"

#include <fmt/format.h>

#include <algorithm>
#include <array>
#include <limits>
#include <set>
#include <stdexcept>

#include "base/error.h"
#include "tables/cells.h"
#include "tables/delimited.h"
#include "tables/units.h"

namespace thirdrung {

namespace {

constexpr std::array<std::string_view, 10> kTextColumns = {"supernova", "survey",    "surveys", "sample", "passband",
                                                           "host",      "reference", "remarks", "source", "subtype"};

struct DefaultUnit {
  std::string_view column;
  const char* unit;
};

constexpr std::array<DefaultUnit, 23> kDefaultUnits = {{
    {"mjd", "d"},
    {"peak_mjd", "d"},
    {"peak_mjd_guess", "d"},
    {"t_0", "d"},
    {"phase", "d"},
    {"first_phase", "d"},
    {"last_phase", "d"},
    {"ra", "deg"},
    {"dec", "deg"},
    {"gal_l", "deg"},
    {"gal_b", "deg"},
    {"flux", "uJy"},
    {"model_flux", "uJy"},
    {"mag", "mag"},
    {"m_b", "mag"},
    {"c", "mag"},
    {"colour", "mag"},
    {"mw_ebv", "mag"},
    {"m_b_standardised", "mag"},
    {"distance_modulus", "mag"},
    {"wavelength", "Angstrom"},
    {"v_pec", "km / s"},
    {"host_log_mass", "dex"},
}};

char delimiter_of(std::string_view text) {
  std::size_t at = 0;
  while (at < text.size()) {
    const std::size_t end = std::min(text.find('\n', at), text.size());
    const std::string_view line = text.substr(at, end - at);
    const std::string_view content = trimmed(line);
    if (!content.empty() && content.front() != '#') {
      for (const char delimiter : {',', '\t', ';'}) {
        if (line.find(delimiter) != std::string_view::npos) return delimiter;
      }
      return ',';
    }
    at = end + 1;
  }
  return ',';
}

std::vector<std::string> column_names(const std::vector<Field>& fields, const std::string& file) {
  std::vector<std::string> names;
  for (const Field& field : fields) {
    const std::string name(field.text);
    if (name.empty()) {
      throw InputError({file, {}, {}}, fmt::format("column {} has no name", names.size() + 1),
                       "name every column in the first line");
    }
    if (has_control_character(name)) {
      throw InputError({file, {}, {}},
                       fmt::format("the name of column {} holds a line break or a control character", names.size() + 1),
                       "give it a name on one line");
    }
    if (parse_real(name) && name != "nan" && name != "inf") {
      throw InputError({file, {}, {}}, fmt::format("the first line names no columns (it holds the number {})", name),
                       "put a line of column names before the rows");
    }
    if (std::find(names.begin(), names.end(), name) != names.end()) {
      throw InputError({file, {}, {}}, fmt::format("two columns are named \"{}\"", name), "rename one");
    }
    names.push_back(name);
  }
  return names;
}

/// The texts as values of the type that `parse` reads, or nothing if one of them is not of it.
template <typename Values, typename Parse>
std::optional<Values> parsed(const std::vector<std::string>& texts, typename Values::value_type missing,
                             const Parse& parse) {
  Values values;
  values.reserve(texts.size());
  for (const std::string& text : texts) {
    if (text.empty()) {
      values.push_back(missing);
      continue;
    }
    const auto value = parse(text);
    if (!value) return std::nullopt;
    values.push_back(*value);
  }
  return values;
}

/// As written by a person or a program; "1" and "0" are numbers here.
std::optional<bool> parse_word_flag(const std::string& text) {
  return text == "1" || text == "0" ? std::nullopt : parse_flag(text);
}

/// The values in the narrowest type that holds every one of them.
auto typed_values(const std::string& name, std::vector<std::string> texts) -> decltype(Column::values) {
  if (std::find(kTextColumns.begin(), kTextColumns.end(), name) != kTextColumns.end()) return texts;
  const bool has_values =
      std::any_of(texts.begin(), texts.end(), [](const std::string& text) { return !text.empty(); });
  if (has_values) {
    if (auto integers = parsed<Column::Integers>(texts, 0, parse_integer)) return *std::move(integers);
  }
  constexpr double nan = std::numeric_limits<double>::quiet_NaN();
  if (auto reals = parsed<Column::Reals>(texts, nan, parse_real)) return *std::move(reals);
  if (auto flags = parsed<Column::Flags>(texts, false, parse_word_flag)) return *std::move(flags);
  return texts;
}

Column column_of(std::string name, std::vector<std::string> texts) {
  Column column;
  column.unit = csv_default_unit(name);
  if (std::find(texts.begin(), texts.end(), "") != texts.end()) {
    column.missing.reserve(texts.size());
    for (const std::string& text : texts) column.missing.push_back(text.empty());
  }
  column.values = typed_values(name, std::move(texts));
  column.name = std::move(name);
  return column;
}

void append_cell(std::string& text, const Table& table, const std::vector<std::vector<std::string>>& cells,
                 std::size_t i, std::size_t row) {
  if (table.columns()[i].is_missing(row)) return;
  append_field(text, cells[i][row], ',', false);
}

}  // namespace

std::string csv_default_unit(std::string_view column) {
  constexpr std::string_view error = "_error";
  if (column.ends_with(error)) column.remove_suffix(error.size());
  const auto* found = std::find_if(kDefaultUnits.begin(), kDefaultUnits.end(),
                                   [&](const DefaultUnit& d) { return d.column == column; });
  return found == kDefaultUnits.end() ? "" : found->unit;
}

Table parse_csv(std::string_view text, const std::string& file) {
  RecordReader records(text, delimiter_of(text), file);
  std::vector<Field> fields;
  if (!records.next(fields)) {
    throw InputError({file, {}, {}}, "is empty", "give a line of column names and one line a row");
  }
  std::vector<std::string> names = column_names(fields, file);
  std::vector<std::vector<std::string>> texts(names.size());
  for (std::size_t row = 0; records.next(fields); ++row) {
    if (fields.size() != names.size()) {
      throw InputError({file, row + 1, {}},
                       fmt::format("line {} has {} fields where the first line names {} columns", records.line(),
                                   fields.size(), names.size()),
                       "give every column one field, empty if the value is missing");
    }
    for (std::size_t i = 0; i < names.size(); ++i) texts[i].emplace_back(fields[i].text);
  }
  Table table(file);
  for (std::size_t i = 0; i < names.size(); ++i) table.add(column_of(std::move(names[i]), std::move(texts[i])));
  return table;
}

std::string format_csv(const Table& table) {
  if (table.columns().empty()) throw std::logic_error("a table without columns cannot be written");
  std::vector<std::vector<std::string>> cells;
  std::string text;
  for (const Column& column : table.columns()) {
    const std::string unit = csv_default_unit(column.name);
    if (!unit.empty() && unit != column.unit && !column.unit.empty()) {
      cells.emplace_back();
      for (const double value : table.reals_in(column.name, unit)) cells.back().push_back(format_real(value));
    } else {
      cells.push_back(table.strings(column.name));
    }
    if (!text.empty()) text += ',';
    append_field(text, column.name, ',', true);
  }
  text += '\n';
  for (std::size_t row = 0; row < table.rows(); ++row) {
    const std::size_t start = text.size();
    for (std::size_t i = 0; i < cells.size(); ++i) {
      if (i > 0) text += ',';
      append_cell(text, table, cells, i, row);
    }
    if (text.size() == start) text += "\"\"";  // a blank line would be passed over
    text += '\n';
  }
  return text;
}

}  // namespace thirdrung
