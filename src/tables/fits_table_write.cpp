#include <fmt/format.h>

#include <algorithm>
#include <limits>
#include <stdexcept>

#include "tables/fits_handle.h"
#include "tables/fits_table.h"
#include "tables/units.h"

namespace thirdrung {

namespace {

std::size_t text_width(const Column& column) {
  std::size_t longest = 1;
  for (const std::string& text : std::get<Column::Strings>(column.values)) longest = std::max(longest, text.size());
  return longest;
}

std::string form_of(const Column& column) {
  if (std::holds_alternative<Column::Reals>(column.values)) return "1D";
  if (std::holds_alternative<Column::Integers>(column.values)) return "1K";
  if (std::holds_alternative<Column::Flags>(column.values)) return "1L";
  return fmt::format("{}A", text_width(column));
}

/// Bytes of one cell.
std::size_t width_of(const Column& column) {
  if (std::holds_alternative<Column::Flags>(column.values)) return 1;
  return std::holds_alternative<Column::Strings>(column.values) ? text_width(column) : 8;
}

/// A whole number that no row has, to stand for "missing".
std::int64_t unused_integer(const Column::Integers& values) {
  std::int64_t candidate = std::numeric_limits<std::int64_t>::min();
  while (std::find(values.begin(), values.end(), candidate) != values.end()) ++candidate;
  return candidate;
}

void write_reals(const FitsHandle& fits, int number, const Column& column) {
  Column::Reals values = std::get<Column::Reals>(column.values);
  for (std::size_t row = 0; row < values.size(); ++row) {
    if (column.is_missing(row)) values[row] = std::numeric_limits<double>::quiet_NaN();
  }
  int status = 0;
  fits_write_col(fits.get(), TDOUBLE, number, 1, 1, static_cast<LONGLONG>(values.size()), values.data(), &status);
  fits.check(status);
}

void write_integers(const FitsHandle& fits, int number, const Column& column) {
  Column::Integers values = std::get<Column::Integers>(column.values);
  int status = 0;
  if (!column.missing.empty()) {
    const std::int64_t null = unused_integer(values);
    for (std::size_t row = 0; row < values.size(); ++row) {
      if (column.is_missing(row)) values[row] = null;
    }
    fits_update_key_lng(fits.get(), fmt::format("TNULL{}", number).c_str(), null, "stands for a missing value",
                        &status);
  }
  std::vector<LONGLONG> numbers(values.begin(), values.end());
  fits_write_col(fits.get(), TLONGLONG, number, 1, 1, static_cast<LONGLONG>(numbers.size()), numbers.data(), &status);
  fits.check(status);
}

void write_flags(const FitsHandle& fits, int number, const Column& column) {
  const auto& flags = std::get<Column::Flags>(column.values);
  std::vector<char> values(flags.begin(), flags.end());
  int status = 0;
  fits_write_col(fits.get(), TLOGICAL, number, 1, 1, static_cast<LONGLONG>(values.size()), values.data(), &status);
  for (std::size_t row = 0; row < values.size(); ++row) {
    if (column.is_missing(row)) fits_write_col_null(fits.get(), number, static_cast<LONGLONG>(row) + 1, 1, 1, &status);
  }
  fits.check(status);
}

/// Texts end with zero bytes: CFITSIO's own filling with blanks would make a missing text look like one of blanks.
void write_texts(const FitsHandle& fits, std::size_t first_byte, const Column& column) {
  const auto& texts = std::get<Column::Strings>(column.values);
  const std::size_t width = text_width(column);
  std::vector<unsigned char> cell(width);
  int status = 0;
  for (std::size_t row = 0; row < texts.size(); ++row) {
    std::fill(cell.begin(), cell.end(), static_cast<unsigned char>(0));
    if (!column.is_missing(row)) std::copy(texts[row].begin(), texts[row].end(), cell.begin());
    fits_write_tblbytes(fits.get(), static_cast<LONGLONG>(row) + 1, static_cast<LONGLONG>(first_byte) + 1,
                        static_cast<LONGLONG>(width), cell.data(), &status);
  }
  fits.check(status);
}

void write_column(const FitsHandle& fits, int number, std::size_t first_byte, const Column& column) {
  if (!column.description.empty()) write_column_comment(fits, number, column.description);
  if (column.size() == 0) return;
  if (std::holds_alternative<Column::Reals>(column.values)) return write_reals(fits, number, column);
  if (std::holds_alternative<Column::Integers>(column.values)) return write_integers(fits, number, column);
  if (std::holds_alternative<Column::Flags>(column.values)) return write_flags(fits, number, column);
  write_texts(fits, first_byte, column);
}

}  // namespace

void append_fits_table(const FitsHandle& fits, const Table& table, const std::string& name,
                       const FitsKeywords& keywords) {
  if (table.columns().empty()) throw std::logic_error("a table without columns cannot be written");
  std::vector<std::string> names;
  std::vector<std::string> forms;
  std::vector<std::string> units;
  for (const Column& column : table.columns()) {
    names.push_back(ascii_escaped(column.name));
    forms.push_back(form_of(column));
    units.push_back(ascii_escaped(fits_spelling(column.unit)));
  }
  const auto pointers = [](std::vector<std::string>& texts) {
    std::vector<char*> result(texts.size());
    std::transform(texts.begin(), texts.end(), result.begin(), [](std::string& text) { return text.data(); });
    return result;
  };
  int status = 0;
  fits_create_tbl(fits.get(), BINARY_TBL, static_cast<LONGLONG>(table.rows()), static_cast<int>(names.size()),
                  pointers(names).data(), pointers(forms).data(), pointers(units).data(),
                  name.empty() ? nullptr : name.c_str(), &status);
  fits.check(status);
  int number = 0;
  std::size_t first_byte = 0;
  for (const Column& column : table.columns()) {
    write_column(fits, ++number, first_byte, column);
    first_byte += width_of(column);
  }
  for (const auto& [key, value] : table.meta()) write_keyword(fits, {key, value, ""});
  for (const FitsKeyword& keyword : keywords) write_keyword(fits, keyword);
}

std::string format_fits_table(const Table& table, const std::string& name) {
  FitsHandle fits;
  append_fits_table(fits, table, name, {});
  return fits.finish();
}

}  // namespace thirdrung
