#include "report/lightcurve_panels.h"

#include <fmt/format.h>

#include <cmath>
#include <iterator>
#include <map>
#include <nlohmann/json.hpp>

#include "report/digits.h"
#include "report/run_tables.h"

namespace thirdrung {
namespace {

/// Number lists of one band, each JSON already but for the brackets.
struct Band {
  std::string phase, mjd, flux, error, model, pull, mistrusted;
  std::vector<float> curve_phase;
  std::string curve_flux, curve_error;
  int points = 0;
};

using Bands = std::vector<std::pair<std::string, Band>>;

void append(std::string& list, double value, int digits) {
  if (!list.empty()) list += ',';
  if (std::isfinite(value))
    fmt::format_to(std::back_inserter(list), "{:.{}g}", value, digits);
  else
    list += "null";
}

void append_fixed(std::string& list, double value, int decimals) {
  if (!list.empty()) list += ',';
  if (std::isfinite(value))
    fmt::format_to(std::back_inserter(list), "{:.{}f}", value, decimals);
  else
    list += "null";
}

Band& band_of(Bands& bands, const std::string& passband) {
  for (auto& [name, band] : bands) {
    if (name == passband) return band;
  }
  return bands.emplace_back(passband, Band{}).second;
}

/// Row of the supernova, or nothing for one the other tables do not know.
const std::size_t* row_of(const SupernovaRows& all, const std::string& name) {
  const auto found = all.index.find(name);
  return found == all.index.end() ? nullptr : &found->second;
}

void read_points(const std::filesystem::path& folder, const SupernovaRows& all, std::vector<Bands>& curves) {
  const auto table = read_result_table(folder, "lightcurve-points");
  if (!table) return;
  const auto names = table->strings("supernova"), passbands = table->strings("passband");
  const auto mjd = table->reals("mjd"), phase = table->reals("phase"), flux = table->reals("flux"),
             error = table->reals("flux_error");
  const auto model = reals_or_missing(*table, "model_flux"), pull = reals_or_missing(*table, "pull");
  const auto mistrusted = flags_or(*table, "mistrusted", false);
  for (std::size_t i = 0; i < names.size(); ++i) {
    const std::size_t* row = row_of(all, names[i]);
    if (row == nullptr) continue;
    Band& band = band_of(curves[*row], passbands[i]);
    append_fixed(band.phase, phase[i], 2);
    append_fixed(band.mjd, mjd[i], 2);
    append(band.flux, flux[i], 4);
    append(band.error, error[i], 3);
    append(band.model, model[i], 4);
    append_fixed(band.pull, pull[i], 2);
    if (mistrusted[i]) append_fixed(band.mistrusted, band.points, 0);
    ++band.points;
  }
}

void read_curves(const std::filesystem::path& folder, const SupernovaRows& all, std::vector<Bands>& curves) {
  const auto table = read_result_table(folder, "lightcurve-curves");
  if (!table) return;
  const auto names = table->strings("supernova"), passbands = table->strings("passband");
  const auto phase = table->reals("phase"), flux = table->reals("model_flux"),
             error = reals_or_missing(*table, "model_error");
  for (std::size_t i = 0; i < names.size(); ++i) {
    const std::size_t* row = row_of(all, names[i]);
    if (row == nullptr) continue;
    Band& band = band_of(curves[*row], passbands[i]);
    band.curve_phase.push_back(static_cast<float>(phase[i]));
    append(band.curve_flux, flux[i], 4);
    append(band.curve_error, error[i], 3);
  }
}

/// [first, step] for evenly spaced phases, the list itself otherwise.
std::string phases_json(const std::vector<float>& phases) {
  if (phases.size() < 2) return phases.empty() ? "[]" : fmt::format("[{:.5g},1]", phases.front());
  const double step = static_cast<double>(phases.back() - phases.front()) / static_cast<double>(phases.size() - 1);
  bool even = true;
  for (std::size_t i = 0; i < phases.size() && even; ++i) {
    even = std::abs(phases[i] - (phases.front() + step * static_cast<double>(i))) < 5e-3;
  }
  if (even) return fmt::format("[{:.5g},{:.8g}]", phases.front(), step);
  std::string list;
  for (const float phase : phases) append_fixed(list, phase, 2);
  return fmt::format("[{}]", list);
}

std::string to_json(const Bands& bands) {
  if (bands.empty()) return "";
  std::string text = "{\"b\":[";
  for (std::size_t k = 0; k < bands.size(); ++k) {
    const auto& [name, band] = bands[k];
    const std::string quoted = nlohmann::json(name).dump(-1, ' ', false, nlohmann::json::error_handler_t::replace);
    fmt::format_to(std::back_inserter(text),
                   "{}{{\"n\":{},\"p\":[{}],\"t\":[{}],\"f\":[{}],\"e\":[{}],\"m\":[{}],\"u\":[{}],\"x\":[{}],\"cp\":{}"
                   ",\"cf\":[{}],\"ce\":[{}]}}",
                   k == 0 ? "" : ",", quoted, band.phase, band.mjd, band.flux, band.error, band.model, band.pull,
                   band.mistrusted, phases_json(band.curve_phase), band.curve_flux, band.curve_error);
  }
  return text + "]}";
}

}  // namespace

std::vector<std::string> lightcurve_panels(const std::filesystem::path& folder, const SupernovaRows& all) {
  std::vector<Bands> curves(all.rows.size());
  read_points(folder, all, curves);
  read_curves(folder, all, curves);
  std::vector<std::string> panels;
  panels.reserve(curves.size());
  for (Bands& bands : curves) {
    panels.push_back(to_json(bands));
    Bands().swap(bands);
  }
  return panels;
}

}  // namespace thirdrung
