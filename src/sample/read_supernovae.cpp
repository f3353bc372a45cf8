#include "sample/read_supernovae.h"

#include <fmt/format.h>

#include <cmath>
#include <map>

#include "base/error.h"
#include "sky/position.h"

namespace thirdrung {
namespace {

constexpr double largest_redshift = 3.0;
constexpr double largest_velocity = 5000.0;  // km/s
constexpr double largest_reddening = 10.0;   // mag
constexpr double smallest_log_mass = 4.0;
constexpr double largest_log_mass = 14.0;

using Numbers = std::vector<double>;

Numbers optional_reals(const Table& table, const std::string& name, const std::string& unit) {
  if (!table.has(name)) return Numbers(table.rows(), missing_value);
  return unit.empty() ? table.reals(name) : table.reals_in(name, unit);
}

// The columns, converted: one vector each.
struct Columns {
  std::vector<std::string> name;
  Numbers ra, dec, z_helio, z_helio_error, z_group, v_pec, mw_ebv, mw_ebv_error, host_log_mass, host_log_mass_error,
      peak_mjd_guess;
};

Columns columns_of(const Table& table) {
  Columns c;
  c.name = table.strings("supernova");
  c.ra = table.reals_in("ra", "deg");
  c.dec = table.reals_in("dec", "deg");
  c.z_helio = table.reals("z_helio");
  c.z_helio_error = optional_reals(table, "z_helio_error", "");
  c.z_group = optional_reals(table, "z_group", "");
  c.v_pec = optional_reals(table, "v_pec", "km/s");
  c.mw_ebv = optional_reals(table, "mw_ebv", "mag");
  c.mw_ebv_error = optional_reals(table, "mw_ebv_error", "mag");
  c.host_log_mass = optional_reals(table, "host_log_mass", "dex");
  c.host_log_mass_error = optional_reals(table, "host_log_mass_error", "dex");
  c.peak_mjd_guess = optional_reals(table, "peak_mjd_guess", "d");
  return c;
}

Supernova row_of(const Columns& c, std::size_t i) {
  Supernova s;
  s.name = c.name[i];
  s.ra = c.ra[i];
  s.dec = c.dec[i];
  s.z_helio = c.z_helio[i];
  s.z_helio_error = c.z_helio_error[i];
  s.z_group = c.z_group[i];
  s.v_pec = c.v_pec[i];
  s.mw_ebv = c.mw_ebv[i];
  s.mw_ebv_error = c.mw_ebv_error[i];
  s.host_log_mass = c.host_log_mass[i];
  s.host_log_mass_error = c.host_log_mass_error[i];
  s.peak_mjd_guess = c.peak_mjd_guess[i];
  return s;
}

std::string redshift_fault(const std::string& column, double z) {
  if (std::isnan(z)) return "";
  if (z <= 0.0) return fmt::format("{} is {:g}: a supernova in the Hubble flow has a positive redshift", column, z);
  if (!(z <= largest_redshift)) return fmt::format("{} is {:g}, above {:g}", column, z, largest_redshift);
  return "";
}

std::string error_fault(const std::string& column, double error) {
  return error < 0.0 || std::isinf(error) ? fmt::format("{} is {:g}", column, error) : "";
}

std::string range_fault(const std::string& column, double value, double low, double high) {
  return value < low || value > high ? fmt::format("{} is {:g}, outside {:g} to {:g}", column, value, low, high) : "";
}

// The first thing wrong with a row, or "".
std::string fault_of(const Supernova& s) {
  if (s.name.empty()) return "supernova is empty: it has no name";
  if (std::isnan(s.ra)) return "ra is missing";
  if (std::isnan(s.dec)) return "dec is missing";
  if (!is_direction(s.ra, s.dec)) return fmt::format("ra, dec of {:g}, {:g} deg is no place in the sky", s.ra, s.dec);
  if (std::isnan(s.z_helio)) return "z_helio is missing";
  const std::string faults[] = {redshift_fault("z_helio", s.z_helio),
                                redshift_fault("z_group", s.z_group),
                                error_fault("z_helio_error", s.z_helio_error),
                                range_fault("v_pec", s.v_pec, -largest_velocity, largest_velocity),
                                range_fault("mw_ebv", s.mw_ebv, 0.0, largest_reddening),
                                error_fault("mw_ebv_error", s.mw_ebv_error),
                                range_fault("host_log_mass", s.host_log_mass, smallest_log_mass, largest_log_mass),
                                error_fault("host_log_mass_error", s.host_log_mass_error)};
  for (const std::string& fault : faults) {
    if (!fault.empty()) return fault;
  }
  return "";
}

}  // namespace

SupernovaList read_supernovae(const Table& table, const std::string& survey) {
  const Columns columns = columns_of(table);
  if (table.rows() == 0) {
    throw InputError({table.origin(), std::nullopt, ""}, "has no rows", "give one row a supernova");
  }
  SupernovaList list;
  std::map<std::string, std::size_t> seen;
  for (std::size_t i = 0; i < table.rows(); ++i) {
    Supernova s = row_of(columns, i);
    s.survey = survey;
    s.place = table.place(i, "");
    std::string fault = fault_of(s);
    if (fault.empty()) {
      const auto [first, fresh] = seen.emplace(s.name, i + 1);
      if (!fresh) fault = fmt::format("supernova is listed twice: row {} is kept", first->second);
    }
    if (fault.empty()) {
      list.supernovae.push_back(std::move(s));
    } else {
      list.set_aside.push_back({s.name, survey, fmt::format("{}, row {}: {}", table.origin(), i + 1, fault)});
    }
  }
  return list;
}

}  // namespace thirdrung
