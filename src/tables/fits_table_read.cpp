#include <fmt/format.h>

#include <algorithm>
#include <array>
#include <cmath>
#include <limits>
#include <memory>

#include "base/error.h"
#include "tables/fits_handle.h"
#include "tables/fits_table.h"

namespace thirdrung {

namespace {

/// Type, repeat count and width of a column, scaling counted in.
struct Form {
  int type = 0;
  long repeat = 0;
  long width = 0;

  bool is_text() const { return type == TSTRING; }
  bool is_real() const { return type == TFLOAT || type == TDOUBLE; }
  bool is_integer() const {
    constexpr std::array<int, 8> integers = {TBYTE, TSBYTE, TSHORT, TUSHORT, TLONG, TULONG, TLONGLONG, TULONGLONG};
    return std::find(integers.begin(), integers.end(), type) != integers.end() || type == TINT || type == TUINT;
  }
  /// One value a cell; the rest are arrays, of fixed or varying length, or complex numbers.
  bool is_single() const {
    if (is_text()) return repeat == width;
    return repeat == 1 && (is_real() || is_integer() || type == TLOGICAL);
  }
};

Form form_of(const FitsHandle& fits, int number) {
  Form form;
  int status = 0;
  fits_get_eqcoltype(fits.get(), number, &form.type, &form.repeat, &form.width, &status);
  fits.check(status);
  return form;
}

std::vector<bool> mask_of(const std::vector<char>& nulls) {
  if (std::find(nulls.begin(), nulls.end(), 1) == nulls.end()) return {};
  return {nulls.begin(), nulls.end()};
}

template <typename Value>
std::vector<Value> read_values(const FitsHandle& fits, int number, int type, std::size_t rows,
                               std::vector<char>& nulls) {
  std::vector<Value> values(rows);
  nulls.assign(rows, 0);
  int any = 0;
  int status = 0;
  if (rows > 0) {
    fits_read_colnull(fits.get(), type, number, 1, 1, static_cast<LONGLONG>(rows), values.data(), nulls.data(), &any,
                      &status);
  }
  fits.check(status);
  return values;
}

void read_reals(const FitsHandle& fits, int number, std::size_t rows, Column& column) {
  auto values = read_real_column(fits, number, rows);
  std::vector<char> nulls(rows);
  std::transform(values.begin(), values.end(), nulls.begin(), [](double value) { return std::isnan(value) ? 1 : 0; });
  column.values = std::move(values);
  column.missing = mask_of(nulls);
}

void read_integers(const FitsHandle& fits, int number, std::size_t rows, Column& column) {
  std::vector<char> nulls;
  const auto values = read_values<LONGLONG>(fits, number, TLONGLONG, rows, nulls);
  Column::Integers integers(values.begin(), values.end());
  for (std::size_t row = 0; row < rows; ++row) {
    if (nulls[row] != 0) integers[row] = 0;
  }
  column.values = std::move(integers);
  column.missing = mask_of(nulls);
}

void read_flags(const FitsHandle& fits, int number, std::size_t rows, Column& column) {
  std::vector<char> nulls;
  const auto values = read_values<char>(fits, number, TLOGICAL, rows, nulls);
  Column::Flags flags(rows, false);
  for (std::size_t row = 0; row < rows; ++row) flags[row] = nulls[row] == 0 && values[row] != 0;
  column.values = std::move(flags);
  column.missing = mask_of(nulls);
}

void read_texts(const FitsHandle& fits, int number, std::size_t rows, std::size_t width, Column& column) {
  std::vector<char> letters(rows * (width + 1), '\0');
  std::vector<char*> pointers(rows);
  for (std::size_t row = 0; row < rows; ++row) pointers[row] = letters.data() + row * (width + 1);
  std::vector<char> nulls(rows, 0);
  int any = 0;
  int status = 0;
  if (rows > 0) {
    fits_read_colnull(fits.get(), TSTRING, number, 1, 1, static_cast<LONGLONG>(rows), pointers.data(), nulls.data(),
                      &any, &status);
  }
  fits.check(status);
  Column::Strings texts(rows);
  for (std::size_t row = 0; row < rows; ++row) {
    texts[row] = pointers[row];
    texts[row].erase(texts[row].find_last_not_of(' ') + 1);
    nulls[row] = texts[row].empty() ? 1 : 0;
  }
  column.values = std::move(texts);
  column.missing = mask_of(nulls);
}

Column read_column(const FitsHandle& fits, int number, const Form& form, std::size_t rows) {
  Column column;
  const auto text = [&](const char* key) { return read_keyword(fits, fmt::format("{}{}", key, number)).value_or(""); };
  column.name = text("TTYPE");
  column.unit = text("TUNIT");
  column.description = text("TCOMM");
  if (column.name.empty()) column.name = fmt::format("column{}", number);
  if (form.is_text()) {
    read_texts(fits, number, rows, static_cast<std::size_t>(form.width), column);
  } else if (form.is_real()) {
    read_reals(fits, number, rows, column);
  } else if (form.is_integer()) {
    read_integers(fits, number, rows, column);
  } else {
    read_flags(fits, number, rows, column);
  }
  return column;
}

}  // namespace

std::vector<double> read_real_column(const FitsHandle& fits, int number, std::size_t count) {
  std::vector<double> values(count);
  if (count == 0) return values;
  int stored = 0;
  int any = 0;
  int status = 0;
  fits_get_coltype(fits.get(), number, &stored, nullptr, nullptr, &status);
  double nan = std::numeric_limits<double>::quiet_NaN();
  const bool is_floating = stored == TFLOAT || stored == TDOUBLE;
  fits_read_col(fits.get(), TDOUBLE, number, 1, 1, static_cast<LONGLONG>(count), is_floating ? nullptr : &nan,
                values.data(), &any, &status);
  fits.check(status);
  return values;
}

Table read_fits_table(const FitsHandle& fits) {
  LONGLONG rows = 0;
  int columns = 0;
  int status = 0;
  fits_get_num_rowsll(fits.get(), &rows, &status);
  fits_get_num_cols(fits.get(), &columns, &status);
  fits.check(status);
  Table table(fits.file());
  for (int number = 1; number <= columns; ++number) {
    const Form form = form_of(fits, number);
    if (!form.is_single()) continue;
    Column column = read_column(fits, number, form, static_cast<std::size_t>(rows));
    if (table.has(column.name)) {
      throw InputError({fits.file(), {}, {}}, fmt::format("two columns are named \"{}\"", column.name), "rename one");
    }
    table.add(std::move(column));
  }
  for (const auto& [key, value] : read_keywords(fits)) table.set_meta(key, value);
  return table;
}

Table parse_fits_table(std::string content, const std::string& file) {
  const FitsHandle fits(std::move(content), file);
  const int count = fits.hdus();
  for (int hdu = 1; hdu <= count; ++hdu) {
    fits.move_to(hdu);
    int type = 0;
    int status = 0;
    fits_get_hdu_type(fits.get(), &type, &status);
    fits.check(status);
    if (type != IMAGE_HDU) return read_fits_table(fits);
  }
  throw InputError({file, {}, {}}, "holds no table", "give a FITS file with a binary table");
}

}  // namespace thirdrung
