#pragma once

#include <array>
#include <string>
#include <string_view>
#include <vector>

namespace thirdrung {

/// What a unit measures: powers of independent dimensions.
struct Dimensions {
  enum Axis { length, mass, time, angle, temperature, current, magnitude, dex, count, axes };
  std::array<int, axes> power{};

  bool operator==(const Dimensions&) const = default;
};

/// A unit as mantissa × 10^exponent of the SI unit of its dimensions. The exponent stands apart so that conversions
/// by powers of ten are exact.
struct UnitValue {
  double mantissa = 1;
  int exponent = 0;
  Dimensions dimensions;
};

/// A named unit, with its SI prefix if it has one ("uJy", "microJansky"). Returns false if the name is unknown.
bool find_named_unit(std::string_view name, UnitValue& unit);

/// Every name that find_named_unit knows without a prefix, and the usual ones with: for suggestions.
std::vector<std::string> common_unit_names();

}  // namespace thirdrung
