#include <fmt/format.h>

#include <array>
#include <charconv>
#include <cmath>

#include "base/text.h"
#include "sample/quality_cuts.h"

namespace thirdrung {
namespace {

struct NumberKey {
  const char* name;
  std::optional<double> CutLimits::*member;
};

struct FlagKey {
  const char* name;
  bool CutLimits::*member;
};

constexpr std::array<NumberKey, 17> number_keys = {{{"z_min", &CutLimits::z_min},
                                                    {"z_max", &CutLimits::z_max},
                                                    {"c_max", &CutLimits::c_max},
                                                    {"s_min", &CutLimits::s_min},
                                                    {"s_max", &CutLimits::s_max},
                                                    {"s_error_max", &CutLimits::s_error_max},
                                                    {"c_error_max", &CutLimits::c_error_max},
                                                    {"m_b_error_max", &CutLimits::m_b_error_max},
                                                    {"t_0_error_max", &CutLimits::t_0_error_max},
                                                    {"first_phase_max", &CutLimits::first_phase_max},
                                                    {"last_phase_min", &CutLimits::last_phase_min},
                                                    {"mw_ebv_max", &CutLimits::mw_ebv_max},
                                                    {"fit_probability_min", &CutLimits::fit_probability_min},
                                                    {"bands_min", &CutLimits::bands_min},
                                                    {"epochs_min", &CutLimits::epochs_min},
                                                    {"host_log_mass_min", &CutLimits::host_log_mass_min},
                                                    {"host_log_mass_max", &CutLimits::host_log_mass_max}}};

constexpr std::array<FlagKey, 2> flag_keys = {{{"trusted", &CutLimits::trusted}, {"host_mass", &CutLimits::host_mass}}};

std::optional<double> limit_from(const std::string& key, const std::string& value, const Place& place) {
  if (value == "off") return std::nullopt;
  double number = 0.0;
  const char* end = value.data() + value.size();
  const auto [stop, error] = std::from_chars(value.data(), end, number);
  if (error != std::errc() || stop != end || !std::isfinite(number)) {
    throw InputError(place, fmt::format("the limit {} is '{}'", key, value), "give a number, or off");
  }
  return number;
}

bool flag_from(const std::string& key, const std::string& value, const Place& place) {
  if (value == "true") return true;
  if (value == "false" || value == "off") return false;
  throw InputError(place, fmt::format("the rule {} is '{}'", key, value), "write true or false");
}

bool set(CutLimits& limits, const std::string& key, const std::string& value, const Place& place) {
  for (const NumberKey& known : number_keys) {
    if (key != known.name) continue;
    limits.*known.member = limit_from(key, value, place);
    return true;
  }
  for (const FlagKey& known : flag_keys) {
    if (key != known.name) continue;
    limits.*known.member = flag_from(key, value, place);
    return true;
  }
  return false;
}

void refuse_crossed(const std::optional<double>& low, const std::optional<double>& high, const std::string& name,
                    const Place& place) {
  if (low && high && *low >= *high) {
    throw InputError(place, fmt::format("{}_min of {:g} is not below {}_max of {:g}", name, *low, name, *high),
                     "no supernova could pass: mend one of the two");
  }
}

}  // namespace

std::vector<std::string> cut_names() {
  std::vector<std::string> names;
  names.reserve(number_keys.size() + flag_keys.size());
  for (const NumberKey& key : number_keys) names.emplace_back(key.name);
  for (const FlagKey& key : flag_keys) names.emplace_back(key.name);
  return names;
}

CutLimits cut_limits_from(std::span<const std::pair<std::string, std::string>> settings, const Place& place) {
  CutLimits limits;
  for (const auto& [key, value] : settings) {
    Place here = place;
    here.column = key;
    if (set(limits, key, value, here)) continue;
    const std::string nearest = nearest_word(key, cut_names());
    throw InputError(here, fmt::format("'{}' is no quality cut", key),
                     nearest.empty() ? "see docs/methods/sample.md for the cuts there are"
                                     : fmt::format("write '{}' if that is meant", nearest));
  }
  refuse_crossed(limits.z_min, limits.z_max, "z", place);
  refuse_crossed(limits.s_min, limits.s_max, "s", place);
  refuse_crossed(limits.host_log_mass_min, limits.host_log_mass_max, "host_log_mass", place);
  return limits;
}

std::vector<std::pair<std::string, std::string>> cut_settings(const CutLimits& limits) {
  std::vector<std::pair<std::string, std::string>> settings;
  for (const NumberKey& key : number_keys) {
    const std::optional<double> limit = limits.*key.member;
    settings.emplace_back(key.name, limit ? fmt::format("{}", *limit) : "off");
  }
  for (const FlagKey& key : flag_keys) settings.emplace_back(key.name, limits.*key.member ? "true" : "false");
  return settings;
}

}  // namespace thirdrung
