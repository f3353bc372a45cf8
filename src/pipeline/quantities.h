#pragma once

#include <string>
#include <vector>

#include "sample/supernova.h"
#include "tables/table.h"

namespace thirdrung {

/// A table of single results: rows quantity, value, error, unit_of_value, meaning.
class Quantities {
 public:
  void add(const std::string& name, double value, double error, const std::string& unit, const std::string& meaning) {
    names_.push_back(name);
    values_.push_back(value);
    errors_.push_back(error);
    units_.push_back(unit);
    meanings_.push_back(meaning);
  }
  void add(const std::string& name, double value, const std::string& unit, const std::string& meaning) {
    add(name, value, missing_value, unit, meaning);
  }
  Table table() const {
    Table out;
    out.add_strings("quantity", names_).add_reals("value", values_).add_reals("error", errors_, "", "1 sigma");
    out.add_strings("unit_of_value", units_).add_strings("meaning", meanings_);
    return out;
  }

 private:
  std::vector<std::string> names_, units_, meanings_;
  std::vector<double> values_, errors_;
};

}  // namespace thirdrung
