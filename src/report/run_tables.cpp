#include "report/run_tables.h"

#include <fmt/format.h>

#include <nlohmann/json.hpp>

#include "base/text.h"
#include "tables/read_write.h"

namespace thirdrung {
namespace {

using nlohmann::json;

double number(const json& object, const char* key) {
  const auto found = object.find(key);
  return found != object.end() && found->is_number() ? found->get<double>() : std::numeric_limits<double>::quiet_NaN();
}

std::string text(const json& object, const char* key) {
  const auto found = object.find(key);
  return found != object.end() && found->is_string() ? found->get<std::string>() : std::string();
}

/// A plain number, or an object with "value" and "error".
Measured measured(const json& object, const std::string& key) {
  const auto found = object.find(key);
  if (found == object.end()) return {};
  if (found->is_number()) return {found->get<double>(), number(object, (key + "_error").c_str())};
  if (found->is_object()) return {number(*found, "value"), number(*found, "error")};
  return {};
}

std::vector<std::string> texts(const json& object, const char* key) {
  std::vector<std::string> result;
  if (const auto found = object.find(key); found != object.end() && found->is_array()) {
    for (const json& item : *found) {
      if (item.is_string()) result.push_back(item.get<std::string>());
    }
  }
  return result;
}

const char* const parameter_names[] = {"alpha", "beta", "gamma", "sigma_int", "s_mean", "s_width", "c_mean", "c_width"};

void read_summary(const std::filesystem::path& path, RunSummary& summary) {
  json root;
  try {
    root = json::parse(read_text_file(path));
  } catch (const json::exception& fault) {
    throw InputError({path.string(), std::nullopt, ""}, "is not valid JSON", "run the stage that writes it again");
  }
  if (!root.is_object()) {
    throw InputError({path.string(), std::nullopt, ""}, "is not a JSON object", "run the stage that writes it again");
  }
  if (const auto ab = root.find("a_b"); ab != root.end() && ab->is_object()) {
    summary.intercept = {number(*ab, "value"), number(*ab, "error")};
    summary.error_stat = number(*ab, "error_stat");
    summary.error_sys = number(*ab, "error_sys");
    summary.blind = ab->value("blind", json(false)) == json(true);
  }
  summary.hubble_constant = measured(root, "h0");
  summary.absolute_magnitude = measured(root, "absolute_magnitude");
  if (const auto join = root.find("join"); join != root.end() && join->is_object()) {
    if (const double n = number(*join, "calibrators"); n == n) summary.calibrators = static_cast<long long>(n);
  }
  if (const double n = number(root, "supernovae"); n == n) summary.supernovae = static_cast<long long>(n);
  summary.scatter_mag = number(root, "scatter_mag");
  summary.z_min = number(root, "z_min");
  summary.z_max = number(root, "z_max");
  for (const char* name : parameter_names) {
    if (const Measured value = measured(root, name); value.value == value.value) summary.parameters[name] = value;
  }
  if (const auto cuts = root.find("cuts"); cuts != root.end() && cuts->is_array()) {
    for (const json& cut : *cuts) {
      if (!cut.is_object()) continue;
      const auto count = [&](const char* key) {
        const double value = number(cut, key);
        return value == value ? static_cast<long long>(value) : 0;
      };
      summary.cuts.push_back({text(cut, "rule"), count("removed_alone"), count("removed_in_order"), count("left")});
    }
  }
  summary.warnings = texts(root, "warnings");
  summary.files = texts(root, "files");
  summary.version = text(root, "version");
  if (const auto inputs = root.find("inputs"); inputs != root.end() && inputs->is_array()) {
    for (const json& input : *inputs) {
      if (input.is_object()) summary.inputs.emplace_back(text(input, "file"), text(input, "sha256"));
    }
  }
}

void read_cuts(const Table& table, RunSummary& summary) {
  summary.cuts.clear();
  const auto rules = table.strings("rule");
  const auto alone = table.integers("removed_alone");
  const auto in_order = table.integers("removed_in_order");
  const auto left = table.integers("left");
  for (std::size_t i = 0; i < rules.size(); ++i) summary.cuts.push_back({rules[i], alone[i], in_order[i], left[i]});
}

void read_parameters(const Table& table, RunSummary& summary) {
  const auto names = table.strings("parameter");
  const auto values = table.reals("value");
  const auto errors = reals_or_missing(table, "error");
  for (std::size_t i = 0; i < names.size(); ++i) summary.parameters[names[i]] = {values[i], errors[i]};
}

}  // namespace

Measured RunSummary::parameter(const std::string& name) const {
  const auto found = parameters.find(name);
  return found == parameters.end() ? Measured{} : found->second;
}

std::optional<Table> read_result_table(const std::filesystem::path& folder, const std::string& name) {
  const std::filesystem::path path = folder / (name + ".ecsv");
  if (!std::filesystem::exists(path)) return std::nullopt;
  Table table = read_table(path);
  if (table.rows() == 0) return std::nullopt;
  return table;
}

RunTables read_run_tables(const std::filesystem::path& folder) {
  RunTables run;
  run.folder = folder;
  const auto summary = folder / "summary.json";
  const bool has_summary = std::filesystem::exists(summary);
  if (has_summary) read_summary(summary, run.summary);
  if (const auto cuts = read_result_table(folder, "cuts")) read_cuts(*cuts, run.summary);
  if (const auto parameters = read_result_table(folder, "standardisation")) read_parameters(*parameters, run.summary);
  run.fits = read_result_table(folder, "lightcurve-fits");
  run.sample = read_result_table(folder, "sample");
  run.standardised = read_result_table(folder, "standardised");
  run.zrange_grid = read_result_table(folder, "zrange-grid");
  run.sky_halves = read_result_table(folder, "sky-halves");
  run.scans = read_result_table(folder, "scans");
  run.budget = read_result_table(folder, "budget");
  run.calibration_derivatives = read_result_table(folder, "calibration-derivatives");
  run.influence = read_result_table(folder, "influence");
  run.fields = read_result_table(folder, "fields");
  run.join = read_result_table(folder, "join");
  run.calibrators = read_result_table(folder, "calibrators");
  if (!has_summary && !run.fits && !run.sample && !run.standardised) {
    throw InputError({folder.string(), std::nullopt, ""},
                     "holds no result of a run (no summary.json, lightcurve-fits.ecsv, sample.ecsv)",
                     "give the output folder of a run");
  }
  return run;
}

std::vector<double> reals_or_missing(const Table& table, const std::string& name) {
  if (table.has(name)) return table.reals(name);
  return std::vector<double>(table.rows(), std::numeric_limits<double>::quiet_NaN());
}

std::vector<std::string> strings_or_empty(const Table& table, const std::string& name) {
  return table.has(name) ? table.strings(name) : std::vector<std::string>(table.rows());
}

std::vector<bool> flags_or(const Table& table, const std::string& name, bool otherwise) {
  return table.has(name) ? table.flags(name) : std::vector<bool>(table.rows(), otherwise);
}

}  // namespace thirdrung
