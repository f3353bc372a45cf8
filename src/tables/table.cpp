#include "tables/table.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <limits>
#include <stdexcept>

#include "base/text.h"
#include "tables/cells.h"
#include "tables/units.h"

namespace thirdrung {

namespace {

constexpr double kNaN = std::numeric_limits<double>::quiet_NaN();

const Column* find(const std::vector<Column>& columns, const std::string& name) {
  const auto found = std::find_if(columns.begin(), columns.end(), [&](const Column& c) { return c.name == name; });
  return found == columns.end() ? nullptr : &*found;
}

double real_of_text(const Table& table, const Column& column, std::size_t row) {
  const std::string& text = std::get<Column::Strings>(column.values)[row];
  if (column.is_missing(row) || text.empty()) return kNaN;
  if (const auto value = parse_real(text)) return *value;
  throw InputError(table.place(row, column.name), fmt::format("{} is not a number", quoted_for_message(text)),
                   "give a number, or leave the field empty");
}

std::int64_t integer_of_real(const Table& table, const Column& column, std::size_t row) {
  const double value = std::get<Column::Reals>(column.values)[row];
  if (column.is_missing(row)) return 0;
  // 2^63 is the first double beyond the range.
  constexpr double limit = 9223372036854775808.0;
  if (value != std::floor(value) || value < -limit || value >= limit) {
    throw InputError(table.place(row, column.name), fmt::format("{} is not a whole number", format_real(value)),
                     "give a whole number");
  }
  return static_cast<std::int64_t>(value);
}

[[noreturn]] void not_a_flag(const Table& table, const Column& column, std::size_t row, const std::string& text) {
  throw InputError(table.place(row, column.name), fmt::format("{} is neither True nor False", quoted_for_message(text)),
                   "write True or False");
}

bool flag_of_number(const Table& table, const Column& column, std::size_t row, double value) {
  if (column.is_missing(row)) return false;
  if (value != 0 && value != 1) not_a_flag(table, column, row, format_real(value));
  return value == 1;
}

}  // namespace

std::size_t Column::size() const {
  return std::visit([](const auto& v) { return v.size(); }, values);
}

bool Table::has(const std::string& name) const {
  return find(columns_, name) != nullptr;
}

const Column& Table::column(const std::string& name) const {
  if (const Column* found = find(columns_, name)) return *found;
  std::vector<std::string> names;
  for (const Column& column : columns_) names.push_back(column.name);
  const std::string nearest = nearest_word(name, names);
  throw InputError({origin_, {}, {}}, fmt::format("there is no column \"{}\"", name),
                   nearest.empty() ? fmt::format("add it; the columns are {}", fmt::join(names, ", "))
                                   : fmt::format("the nearest name is \"{}\"; rename it or add the column", nearest));
}

std::vector<double> Table::reals(const std::string& name) const {
  const Column& source = column(name);
  std::vector<double> result(source.size());
  for (std::size_t row = 0; row < result.size(); ++row) {
    if (const auto* reals = std::get_if<Column::Reals>(&source.values)) {
      result[row] = source.is_missing(row) ? kNaN : (*reals)[row];
    } else if (const auto* integers = std::get_if<Column::Integers>(&source.values)) {
      result[row] = source.is_missing(row) ? kNaN : static_cast<double>((*integers)[row]);
    } else if (const auto* flags = std::get_if<Column::Flags>(&source.values)) {
      result[row] = source.is_missing(row) ? kNaN : ((*flags)[row] ? 1.0 : 0.0);
    } else {
      result[row] = real_of_text(*this, source, row);
    }
  }
  return result;
}

std::vector<double> Table::reals_in(const std::string& name, const std::string& unit) const {
  const double factor = conversion_factor(column(name).unit, unit, place(name));
  std::vector<double> result = reals(name);
  if (factor != 1.0) {
    for (double& value : result) value *= factor;
  }
  return result;
}

std::vector<std::string> Table::strings(const std::string& name) const {
  const Column& source = column(name);
  if (const auto* texts = std::get_if<Column::Strings>(&source.values)) return *texts;
  std::vector<std::string> result(source.size());
  for (std::size_t row = 0; row < result.size(); ++row) {
    if (source.is_missing(row)) continue;
    if (const auto* reals = std::get_if<Column::Reals>(&source.values)) {
      result[row] = format_real((*reals)[row]);
    } else if (const auto* integers = std::get_if<Column::Integers>(&source.values)) {
      result[row] = fmt::format("{}", (*integers)[row]);
    } else {
      result[row] = std::get<Column::Flags>(source.values)[row] ? "True" : "False";
    }
  }
  return result;
}

std::vector<std::int64_t> Table::integers(const std::string& name) const {
  const Column& source = column(name);
  if (const auto* integers = std::get_if<Column::Integers>(&source.values)) return *integers;
  std::vector<std::int64_t> result(source.size());
  for (std::size_t row = 0; row < result.size(); ++row) {
    if (std::holds_alternative<Column::Reals>(source.values)) {
      result[row] = integer_of_real(*this, source, row);
    } else if (const auto* flags = std::get_if<Column::Flags>(&source.values)) {
      result[row] = (*flags)[row] ? 1 : 0;
    } else {
      const std::string& text = std::get<Column::Strings>(source.values)[row];
      const auto value = text.empty() ? std::optional<std::int64_t>(0) : parse_integer(text);
      if (!value) {
        throw InputError(place(row, name), fmt::format("{} is not a whole number", quoted_for_message(text)),
                         "give a whole number");
      }
      result[row] = *value;
    }
  }
  return result;
}

std::vector<bool> Table::flags(const std::string& name) const {
  const Column& source = column(name);
  if (const auto* flags = std::get_if<Column::Flags>(&source.values)) return *flags;
  std::vector<bool> result(source.size());
  for (std::size_t row = 0; row < result.size(); ++row) {
    if (const auto* reals = std::get_if<Column::Reals>(&source.values)) {
      result[row] = flag_of_number(*this, source, row, (*reals)[row]);
    } else if (const auto* integers = std::get_if<Column::Integers>(&source.values)) {
      result[row] = flag_of_number(*this, source, row, static_cast<double>((*integers)[row]));
    } else {
      const std::string& text = std::get<Column::Strings>(source.values)[row];
      const auto value = text.empty() ? std::optional<bool>(false) : parse_flag(text);
      if (!value) not_a_flag(*this, source, row, text);
      result[row] = *value;
    }
  }
  return result;
}

Table& Table::add(Column column) {
  if (has(column.name)) throw std::logic_error(fmt::format("column \"{}\" is already in the table", column.name));
  if (!columns_.empty() && column.size() != rows()) {
    throw std::logic_error(fmt::format("column \"{}\" has {} rows, the table {}", column.name, column.size(), rows()));
  }
  if (!column.missing.empty() && column.missing.size() != column.size()) {
    throw std::logic_error(fmt::format("column \"{}\" has a mask of another length", column.name));
  }
  columns_.push_back(std::move(column));
  return *this;
}

Table& Table::add_reals(std::string name, std::vector<double> values, std::string unit, std::string description) {
  return add({std::move(name), std::move(unit), std::move(description), std::move(values), {}});
}

Table& Table::add_integers(std::string name, std::vector<std::int64_t> values, std::string unit,
                           std::string description) {
  return add({std::move(name), std::move(unit), std::move(description), std::move(values), {}});
}

Table& Table::add_strings(std::string name, std::vector<std::string> values, std::string description) {
  return add({std::move(name), "", std::move(description), std::move(values), {}});
}

Table& Table::add_flags(std::string name, std::vector<bool> values, std::string description) {
  return add({std::move(name), "", std::move(description), std::move(values), {}});
}

std::optional<std::string> Table::meta(const std::string& key) const {
  for (const auto& [name, value] : meta_) {
    if (name == key) return value;
  }
  return std::nullopt;
}

void Table::set_meta(const std::string& key, std::string value) {
  for (auto& [name, old] : meta_) {
    if (name == key) {
      old = std::move(value);
      return;
    }
  }
  meta_.emplace_back(key, std::move(value));
}

}  // namespace thirdrung
