#include "tables/units.h"

#include <fmt/format.h>

#include <cmath>
#include <stdexcept>

#include "tables/unit_parser.h"

namespace thirdrung {

double conversion_factor(const std::string& from, const std::string& to, const Place& place) {
  if (from == to) return 1.0;
  ParsedUnit target;
  try {
    target = parse_unit(to);
  } catch (const UnitFault& wrong) {
    throw std::logic_error(fmt::format("the unit \"{}\" {}", to, wrong.fault));
  }
  const std::string wanted = to.empty() ? "a pure number" : fmt::format("\"{}\"", to);
  if (from.empty()) {
    throw InputError(place, "has no unit", fmt::format("state its unit, {} or one that converts to it", wanted));
  }
  ParsedUnit source;
  try {
    source = parse_unit(from);
  } catch (const UnitFault& wrong) {
    throw InputError(place, fmt::format("its unit \"{}\" {}", from, wrong.fault),
                     fmt::format("give {} or a unit that converts to it", wanted));
  }
  if (source.value.dimensions != target.value.dimensions) {
    throw InputError(place, fmt::format("its unit \"{}\" is of another kind than {}", from, wanted),
                     fmt::format("give {} or a unit that converts to it", wanted));
  }
  const int exponent = source.value.exponent - target.value.exponent;
  const double ratio = source.value.mantissa / target.value.mantissa;
  // A division by a whole power of ten rounds once; a product with 1e-3 would round twice.
  return exponent >= 0 ? ratio * std::pow(10.0, exponent) : ratio / std::pow(10.0, -exponent);
}

std::string fits_spelling(const std::string& unit) {
  ParsedUnit parsed;
  try {
    parsed = parse_unit(unit);
  } catch (const UnitFault&) {
    return unit;
  }
  if (parsed.has_number) return unit;
  std::string spelled;
  for (const Factor& factor : parsed.factors) {
    if (!spelled.empty()) spelled += ' ';
    spelled += factor.name;
    if (factor.power != 1) spelled += fmt::format("{}", factor.power);
  }
  return spelled;
}

}  // namespace thirdrung
