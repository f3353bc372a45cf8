#include "tables/unit_names.h"

#include <initializer_list>
#include <numbers>
#include <utility>

namespace thirdrung {

namespace {

using Axis = Dimensions::Axis;
using Powers = std::initializer_list<std::pair<Axis, int>>;

struct NamedUnit {
  std::string_view name;
  double mantissa;
  int exponent;
  std::array<int, Axis::axes> power;
  bool takes_prefix;
};

constexpr std::array<int, Axis::axes> powers(Powers list) {
  std::array<int, Axis::axes> result{};
  for (const auto& [axis, power] : list) result[axis] = power;
  return result;
}

constexpr auto kNumber = powers({});
constexpr auto kLength = powers({{Axis::length, 1}});
constexpr auto kMass = powers({{Axis::mass, 1}});
constexpr auto kTime = powers({{Axis::time, 1}});
constexpr auto kAngle = powers({{Axis::angle, 1}});
constexpr auto kFluxDensity = powers({{Axis::mass, 1}, {Axis::time, -2}});  // W m-2 Hz-1
constexpr auto kEnergy = powers({{Axis::mass, 1}, {Axis::length, 2}, {Axis::time, -2}});
constexpr auto kPower = powers({{Axis::mass, 1}, {Axis::length, 2}, {Axis::time, -3}});
constexpr auto kMagnitude = powers({{Axis::magnitude, 1}});
constexpr auto kDex = powers({{Axis::dex, 1}});
constexpr auto kCount = powers({{Axis::count, 1}});
constexpr double kDegree = std::numbers::pi / 180;

// Definitions: FITS standard 4.0, tables 3 to 5; IAU 2012 resolution B2 (au), IAU 2015 resolution B3 (solar mass
// parameter over the CODATA 2018 G) and B2 (pc); Oke & Gunn 1983 (the AB zero point of 3631 Jy).
constexpr NamedUnit kUnits[] = {
    {"Jy", 1, -26, kFluxDensity, true},
    {"jansky", 1, -26, kFluxDensity, true},
    {"Jansky", 1, -26, kFluxDensity, true},
    {"AB", 3.631, -23, kFluxDensity, false},
    {"mgy", 3.631, -23, kFluxDensity, true},
    {"maggy", 3.631, -23, kFluxDensity, true},
    {"mag", 1, 0, kMagnitude, true},
    {"dex", 1, 0, kDex, false},
    {"m", 1, 0, kLength, true},
    {"Angstrom", 1, -10, kLength, false},
    {"angstrom", 1, -10, kLength, false},
    {"AA", 1, -10, kLength, false},
    {"Å", 1, -10, kLength, false},
    {"micron", 1, -6, kLength, false},
    {"au", 1.495978707, 11, kLength, false},
    {"AU", 1.495978707, 11, kLength, false},
    {"pc", 3.0856775814913673, 16, kLength, true},
    {"s", 1, 0, kTime, true},
    {"sec", 1, 0, kTime, false},
    {"second", 1, 0, kTime, false},
    {"min", 60, 0, kTime, false},
    {"minute", 60, 0, kTime, false},
    {"h", 3600, 0, kTime, false},
    {"hr", 3600, 0, kTime, false},
    {"hour", 3600, 0, kTime, false},
    {"d", 86400, 0, kTime, false},
    {"day", 86400, 0, kTime, false},
    {"days", 86400, 0, kTime, false},
    {"yr", 31557600, 0, kTime, true},
    {"a", 31557600, 0, kTime, false},
    {"rad", 1, 0, kAngle, true},
    {"radian", 1, 0, kAngle, false},
    {"deg", kDegree, 0, kAngle, false},
    {"degree", kDegree, 0, kAngle, false},
    {"degrees", kDegree, 0, kAngle, false},
    {"hourangle", 15 * kDegree, 0, kAngle, false},
    {"arcmin", kDegree / 60, 0, kAngle, false},
    {"arcsec", kDegree / 3600, 0, kAngle, true},
    {"mas", kDegree / 3600, -3, kAngle, false},
    {"uas", kDegree / 3600, -6, kAngle, false},
    {"Hz", 1, 0, powers({{Axis::time, -1}}), true},
    {"g", 1, -3, kMass, true},
    {"solMass", 1.988409870698051, 30, kMass, false},
    {"Msun", 1.988409870698051, 30, kMass, false},
    {"M_sun", 1.988409870698051, 30, kMass, false},
    {"J", 1, 0, kEnergy, true},
    {"erg", 1, -7, kEnergy, false},
    {"eV", 1.602176634, -19, kEnergy, true},
    {"W", 1, 0, kPower, true},
    {"K", 1, 0, powers({{Axis::temperature, 1}}), true},
    {"A", 1, 0, powers({{Axis::current, 1}}), true},
    {"ct", 1, 0, kCount, false},
    {"count", 1, 0, kCount, false},
    {"counts", 1, 0, kCount, false},
    {"adu", 1, 0, kCount, false},
    {"electron", 1, 0, kCount, false},
    {"ph", 1, 0, kCount, false},
    {"photon", 1, 0, kCount, false},
    {"pix", 1, 0, kCount, false},
    {"pixel", 1, 0, kCount, false},
    {"%", 1, -2, kNumber, false},
    {"dimensionless", 1, 0, kNumber, false},
};

constexpr std::pair<std::string_view, int> kPrefixes[] = {
    {"da", 1},     {"d", -1},   {"c", -2},   {"m", -3},   {"u", -6},     {"µ", -6},     {"μ", -6},
    {"n", -9},     {"p", -12},  {"f", -15},  {"a", -18},  {"h", 2},      {"k", 3},      {"M", 6},
    {"G", 9},      {"T", 12},   {"P", 15},   {"E", 18},   {"milli", -3}, {"micro", -6}, {"nano", -9},
    {"centi", -2}, {"kilo", 3}, {"mega", 6}, {"giga", 9},
};

const NamedUnit* find_exact(std::string_view name) {
  for (const NamedUnit& unit : kUnits) {
    if (unit.name == name) return &unit;
  }
  return nullptr;
}

UnitValue value_of(const NamedUnit& unit, int prefix) {
  return {unit.mantissa, unit.exponent + prefix, {unit.power}};
}

}  // namespace

bool find_named_unit(std::string_view name, UnitValue& unit) {
  if (const NamedUnit* found = find_exact(name)) {
    unit = value_of(*found, 0);
    return true;
  }
  for (const auto& [prefix, exponent] : kPrefixes) {
    if (!name.starts_with(prefix)) continue;
    const NamedUnit* found = find_exact(name.substr(prefix.size()));
    if (found != nullptr && found->takes_prefix) {
      unit = value_of(*found, exponent);
      return true;
    }
  }
  return false;
}

std::vector<std::string> common_unit_names() {
  std::vector<std::string> names = {"uJy", "mJy", "nJy", "nm", "um", "km", "cm", "kg", "nmgy", "mmag", "Mpc"};
  for (const NamedUnit& unit : kUnits) names.emplace_back(unit.name);
  return names;
}

}  // namespace thirdrung
