#include "pipeline/summary.h"

#include <cmath>
#include <map>
#include <nlohmann/json.hpp>

#include "base/atomic_file.h"
#include "base/text.h"
#include "pipeline/blinding.h"
#include "pipeline/version.h"
#include "tables/read_write.h"

namespace thirdrung {

namespace fs = std::filesystem;
using nlohmann::ordered_json;

namespace {

std::optional<Table> result(const fs::path& folder, const std::string& name) {
  const fs::path path = folder / (name + ".ecsv");
  std::error_code ignored;
  if (!fs::exists(path, ignored)) return std::nullopt;
  return read_table(path);
}

ordered_json number(double value) {
  return std::isfinite(value) ? ordered_json(value) : ordered_json(nullptr);
}

struct Row {
  double value = missing_value;
  double error = missing_value;
};

std::map<std::string, Row> rows_by_name(const Table& table, const std::string& key) {
  std::map<std::string, Row> out;
  const auto names = table.strings(key);
  const auto values = table.reals("value"), errors = table.reals("error");
  for (std::size_t i = 0; i < names.size(); ++i) out[names[i]] = {values[i], errors[i]};
  return out;
}

void add_intercept(ordered_json& root, const fs::path& folder, bool blind) {
  const auto table = result(folder, "intercept");
  if (!table) return;
  auto rows = rows_by_name(*table, "quantity");
  root["a_b"] = {
      {"value", number(rows["a_b"].value)},
      {"error", number(rows["a_b"].error)},
      {"error_stat", number(rows["a_b_error_stat"].value)},
      {"error_sys", rows["a_b_error_sys"].value > 0 ? number(rows["a_b_error_sys"].value) : ordered_json(nullptr)},
      {"blind", blind}};
  root["supernovae"] = static_cast<std::int64_t>(rows["supernovae"].value);
  root["scatter_mag"] = number(rows["scatter"].value);
  root["z_min"] = number(rows["z_min"].value);
  root["z_max"] = number(rows["z_max"].value);
  root["chi2"] = number(rows["chi2"].value);
  root["dof"] = static_cast<std::int64_t>(rows["dof"].value);
  root["probability"] = number(rows["probability"].value);
  for (const char* name : {"q0", "dipole", "dipole_l", "dipole_b"}) {
    if (rows.contains(name)) root[name] = {{"value", number(rows[name].value)}, {"error", number(rows[name].error)}};
  }
}

void add_parameters(ordered_json& root, const fs::path& folder) {
  const auto table = result(folder, "standardisation");
  if (!table) return;
  for (const auto& [name, row] : rows_by_name(*table, "parameter")) {
    if (name == "intercept") continue;
    root[name] = {{"value", number(row.value)}, {"error", number(row.error)}};
  }
}

void add_cuts(ordered_json& root, const fs::path& folder) {
  const auto table = result(folder, "cuts");
  if (!table) return;
  root["cuts"] = ordered_json::array();
  const auto rule = table->strings("rule");
  const auto alone = table->integers("removed_alone"), in_order = table->integers("removed_in_order"),
             left = table->integers("left");
  for (std::size_t i = 0; i < rule.size(); ++i) {
    root["cuts"].push_back(
        {{"rule", rule[i]}, {"removed_alone", alone[i]}, {"removed_in_order", in_order[i]}, {"left", left[i]}});
  }
}

void add_join(ordered_json& root, const fs::path& folder) {
  const auto table = result(folder, "join");
  if (!table) return;
  auto rows = rows_by_name(*table, "quantity");
  for (const auto& [name, row] : rows) {
    if (name == "h0" || name == "m_b")
      root[name == "m_b" ? "absolute_magnitude" : name] = {{"value", number(row.value)}, {"error", number(row.error)}};
  }
  if (!rows.contains("calibrators")) return;
  ordered_json shares;
  for (const char* name : {"calibrators", "hubble_flow", "coefficients", "systematics"})
    shares[name] = number(rows[std::string("share_of_") + name].value);
  root["join"] = {{"calibrators", static_cast<std::int64_t>(rows["calibrators"].value)},
                  {"hosts", static_cast<std::int64_t>(rows["hosts"].value)},
                  {"correlation", number(rows["correlation"].value)},
                  {"calibrator_scatter_mag", number(rows["calibrator_scatter"].value)},
                  {"chi2", number(rows["chi2"].value)},
                  {"dof", static_cast<std::int64_t>(rows["dof"].value)},
                  {"shares", shares}};
}

ordered_json inputs_json(const std::vector<InputChecksum>& inputs) {
  ordered_json list = ordered_json::array();
  for (const InputChecksum& one : inputs) list.push_back({{"file", one.file}, {"sha256", one.sha256}});
  return list;
}

ordered_json files_json(const OutputFolder& folder) {
  std::vector<std::string> names = {"provenance.json", "summary.json"};
  for (const auto& [stage, record] : folder.stages()) {
    for (const auto& [name, sha256] : record.files) names.push_back(name);
  }
  std::sort(names.begin(), names.end());
  return names;
}

ordered_json provenance_json(const RunFile& run, const OutputFolder& folder, const std::vector<InputChecksum>& inputs) {
  ordered_json root = {{"program", program_version()}};
  for (const auto& [name, version] : library_versions()) root["libraries"][name] = version;
  root["run_file"] = {{"name", run.path.filename().string()}, {"sha256", sha256_of_text(run.text)}, {"text", run.text}};
  root["seed"] = run.seed;
  root["inputs"] = inputs_json(inputs);
  for (const auto& [stage, record] : folder.stages()) {
    root["stages"][stage]["key"] = record.key;
    root["stages"][stage]["files"] = record.files;
  }
  root["blind"] = is_blind(run);
  if (const auto record = read_unblinding(run.output)) {
    root["unblinding"] = {{"by", record->by},
                          {"when", record->when},
                          {"run_file_sha256", record->run_file_sha256},
                          {"inputs", record->inputs},
                          {"run_file_changed_since", record->run_file_sha256 != sha256_of_text(run.text)}};
  }
  return root;
}

}  // namespace

void write_summary(const RunFile& run, const OutputFolder& folder, const std::vector<InputChecksum>& inputs) {
  ordered_json root = {{"name", run.name}};
  add_intercept(root, folder.path(), is_blind(run));
  add_join(root, folder.path());
  add_parameters(root, folder.path());
  add_cuts(root, folder.path());
  root["warnings"] = run_warnings(run, folder.path());
  root["inputs"] = inputs_json(inputs);
  root["version"] = program_version();
  root["files"] = files_json(folder);
  write_file_atomically(folder.path() / "summary.json", root.dump(1) + "\n");
  write_file_atomically(folder.path() / "provenance.json", provenance_json(run, folder, inputs).dump(1) + "\n");
}

}  // namespace thirdrung
