#pragma once

#include <string>
#include <vector>

#include "tables/unit_names.h"

namespace thirdrung {

/// One named factor of a parsed unit, for writing it out again.
struct Factor {
  std::string name;
  int power;
};

/// A unit as its value and its named factors in order. `has_number` also marks one that cannot be spelled anew from
/// them.
struct ParsedUnit {
  UnitValue value;
  std::vector<Factor> factors;
  bool has_number = false;
};

/// Thrown by the parser; `fault` ends a sentence that begins with the unit.
struct UnitFault {
  std::string fault;
};

/// Reads a unit as units.h describes; an empty text is a pure number. Throws UnitFault.
ParsedUnit parse_unit(const std::string& text);

}  // namespace thirdrung
