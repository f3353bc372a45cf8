#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <limits>
#include <memory>
#include <utility>
#include <vector>

#include "base/error.h"
#include "tables/cells.h"
#include "tables/delimited.h"
#include "tables/ecsv.h"
#include "tables/ecsv_header.h"

namespace thirdrung {

namespace {

/// Nearest number of half precision (IEEE 754-2019, binary16: 11 significant bits, smallest step 2^-24).
double rounded_to_half(double value) {
  if (!std::isfinite(value) || value == 0) return value;
  const double step = std::ldexp(1.0, std::max(std::ilogb(value) - 10, -24));
  const double rounded = std::nearbyint(value / step) * step;
  return std::abs(rounded) > 65504 ? std::copysign(HUGE_VAL, value) : rounded;
}

/// Collects the cells of one column in its declared type.
class CellReader {
 public:
  CellReader(const EcsvColumn& declared, std::string file) : declared_(declared), file_(std::move(file)) {
    switch (declared.kind) {
      case EcsvColumn::Kind::real:
      case EcsvColumn::Kind::single:
      case EcsvColumn::Kind::half:
        values_ = Column::Reals();
        break;
      case EcsvColumn::Kind::integer:
        values_ = Column::Integers();
        break;
      case EcsvColumn::Kind::flag:
        values_ = Column::Flags();
        break;
      case EcsvColumn::Kind::text:
        values_ = Column::Strings();
        break;
    }
  }

  void add(const Field& field, bool missing, std::size_t row) {
    if (missing && missing_.size() < row + 1) missing_.resize(row, false);
    if (missing || !missing_.empty()) missing_.push_back(missing);
    switch (declared_.kind) {
      case EcsvColumn::Kind::real:
      case EcsvColumn::Kind::single:
      case EcsvColumn::Kind::half:
        std::get<Column::Reals>(values_).push_back(real(field, missing, row));
        break;
      case EcsvColumn::Kind::integer:
        std::get<Column::Integers>(values_).push_back(integer(field, missing, row));
        break;
      case EcsvColumn::Kind::flag:
        std::get<Column::Flags>(values_).push_back(flag(field, missing, row));
        break;
      case EcsvColumn::Kind::text:
        std::get<Column::Strings>(values_).emplace_back(field.text);
        break;
    }
  }

  Column finish() && {
    return {declared_.name, declared_.unit, declared_.description, std::move(values_), std::move(missing_)};
  }

 private:
  double real(const Field& field, bool missing, std::size_t row) const {
    if (missing) return std::numeric_limits<double>::quiet_NaN();
    const auto value = parse_real(field.text);
    if (!value) fail(field, row, "a number");
    if (declared_.kind == EcsvColumn::Kind::single) return static_cast<double>(static_cast<float>(*value));
    if (declared_.kind == EcsvColumn::Kind::half) return rounded_to_half(*value);
    return *value;
  }

  std::int64_t integer(const Field& field, bool missing, std::size_t row) const {
    if (missing) return 0;
    const auto value = parse_integer(field.text);
    if (!value || *value < declared_.smallest || *value > declared_.largest)
      fail(field, row, "a whole number of type " + declared_.datatype);
    return *value;
  }

  bool flag(const Field& field, bool missing, std::size_t row) const {
    if (missing) return false;
    const auto value = parse_flag(field.text);
    if (!value) fail(field, row, "True or False");
    return *value;
  }

  [[noreturn]] void fail(const Field& field, std::size_t row, const std::string& wanted) const {
    throw InputError({file_, row + 1, declared_.name},
                     fmt::format("{} is not {}", quoted_for_message(field.text), wanted),
                     fmt::format("give {}, or leave the field empty", wanted));
  }

  const EcsvColumn& declared_;
  std::string file_;
  std::variant<Column::Reals, Column::Integers, Column::Strings, Column::Flags> values_;
  std::vector<bool> missing_;
};

void check_names(const std::vector<Field>& names, const EcsvHeader& header, const std::string& file) {
  bool same = names.size() == header.columns.size();
  for (std::size_t i = 0; same && i < names.size(); ++i) same = names[i].text == header.columns[i].name;
  if (same) return;
  std::vector<std::string_view> found(names.size());
  std::transform(names.begin(), names.end(), found.begin(), [](const Field& name) { return name.text; });
  std::vector<std::string_view> declared(header.columns.size());
  std::transform(header.columns.begin(), header.columns.end(), declared.begin(),
                 [](const EcsvColumn& column) { return std::string_view(column.name); });
  throw InputError({file, {}, {}},
                   fmt::format("the line of column names ({}) differs from the header's \"datatype\" ({})",
                               fmt::join(found, ", "), fmt::join(declared, ", ")),
                   "make them agree, in the same order");
}

}  // namespace

Table parse_ecsv(std::string_view text, const std::string& file) {
  const EcsvHeader header = parse_ecsv_header(text, file);
  RecordReader records(text.substr(header.length), header.delimiter, file, header.lines + 1);
  std::vector<Field> fields;
  if (!records.next(fields)) {
    throw InputError({file, {}, {}}, "ends before the line of column names", "give the whole file");
  }
  check_names(fields, header, file);
  std::vector<CellReader> cells;
  for (const EcsvColumn& column : header.columns) cells.emplace_back(column, file);
  for (std::size_t row = 0; records.next(fields); ++row) {
    if (fields.size() != cells.size()) {
      throw InputError({file, row + 1, {}},
                       fmt::format("line {} has {} fields where the header names {} columns", records.line(),
                                   fields.size(), cells.size()),
                       "give every column one field, empty if the value is missing");
    }
    for (std::size_t i = 0; i < cells.size(); ++i) {
      // Between blanks an empty text cannot be told from a missing one, and neither can an empty number in quotes.
      const bool can_be_empty = header.delimiter == ',' && header.columns[i].kind == EcsvColumn::Kind::text;
      cells[i].add(fields[i], fields[i].text.empty() && !(fields[i].quoted && can_be_empty), row);
    }
  }
  Table table(file);
  for (CellReader& reader : cells) table.add(std::move(reader).finish());
  for (const auto& [key, value] : header.meta) table.set_meta(key, value);
  return table;
}

}  // namespace thirdrung
