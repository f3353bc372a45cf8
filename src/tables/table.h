#pragma once

#include <cstdint>
#include <optional>
#include <string>
#include <utility>
#include <variant>
#include <vector>

#include "base/error.h"

namespace thirdrung {

/// One column of a table: a name, a unit, a type, and a value or "missing" for every row.
///
/// Units are strings in the spelling of the FITS standard and of ECSV ("uJy", "mag", "d", "deg", "Angstrom", "km / s"),
/// "" for a pure number. Missing reals are NaN, missing strings "", missing integers 0 with the mask set.
struct Column {
  using Reals = std::vector<double>;
  using Integers = std::vector<std::int64_t>;
  using Strings = std::vector<std::string>;
  using Flags = std::vector<bool>;

  std::string name;
  std::string unit;
  std::string description;
  std::variant<Reals, Integers, Strings, Flags> values;
  std::vector<bool> missing;  ///< Empty if nothing is missing, else one flag a row.

  std::size_t size() const;
  bool is_missing(std::size_t row) const { return !missing.empty() && missing[row]; }
};

/// Named columns of equal length, with ordered key-value remarks ("meta").
///
/// Remembers the file it was read from, so that errors found later name file, row and column.
class Table {
 public:
  Table() = default;
  /// @param origin name of the file (or other source) that errors are to name.
  explicit Table(std::string origin) : origin_(std::move(origin)) {}

  std::size_t rows() const { return columns_.empty() ? 0 : columns_.front().size(); }
  const std::vector<Column>& columns() const { return columns_; }
  const std::string& origin() const { return origin_; }
  void set_origin(std::string origin) { origin_ = std::move(origin); }

  bool has(const std::string& name) const;
  /// Throws InputError naming the nearest existing column if there is none of that name.
  const Column& column(const std::string& name) const;

  /// Real column, integers converted; missing values are NaN. Throws InputError if absent or text.
  std::vector<double> reals(const std::string& name) const;
  /// As reals(), converted from the column's unit to `unit`. Throws InputError if the unit is absent or of another
  /// kind.
  std::vector<double> reals_in(const std::string& name, const std::string& unit) const;
  /// Text of every row; numbers are written out. Missing values are "".
  std::vector<std::string> strings(const std::string& name) const;
  std::vector<std::int64_t> integers(const std::string& name) const;
  std::vector<bool> flags(const std::string& name) const;

  /// Adds a column; throws std::logic_error if its length differs or its name is taken.
  Table& add(Column column);
  Table& add_reals(std::string name, std::vector<double> values, std::string unit = "", std::string description = "");
  Table& add_integers(std::string name, std::vector<std::int64_t> values, std::string unit = "",
                      std::string description = "");
  Table& add_strings(std::string name, std::vector<std::string> values, std::string description = "");
  Table& add_flags(std::string name, std::vector<bool> values, std::string description = "");

  const std::vector<std::pair<std::string, std::string>>& meta() const { return meta_; }
  std::optional<std::string> meta(const std::string& key) const;
  void set_meta(const std::string& key, std::string value);

  /// Place of a cell, for an error message. `row` counts from 0 here and from 1 in the message.
  Place place(std::size_t row, const std::string& column) const { return {origin_, row + 1, column}; }
  Place place(const std::string& column) const { return {origin_, std::nullopt, column}; }

 private:
  std::string origin_;
  std::vector<Column> columns_;
  std::vector<std::pair<std::string, std::string>> meta_;
};

}  // namespace thirdrung
