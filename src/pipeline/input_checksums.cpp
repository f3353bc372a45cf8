#include <fmt/format.h>
#include <toml++/toml.h>

#include <algorithm>
#include <filesystem>

#include "base/text.h"
#include "pipeline/inputs.h"

namespace thirdrung {

namespace fs = std::filesystem;

namespace {

/// A file, or the tables of a folder in order of name.
void add(std::vector<InputChecksum>& list, const InputFile& file) {
  if (!file.given()) return;
  require_exists(file);
  if (!fs::is_directory(file.path)) {
    list.push_back({file.written, sha256_of_file(file.path)});
    return;
  }
  std::vector<fs::path> inside;
  for (const auto& entry : fs::directory_iterator(file.path)) {
    if (entry.is_regular_file()) inside.push_back(entry.path());
  }
  std::sort(inside.begin(), inside.end());
  for (const fs::path& one : inside) {
    list.push_back({(fs::path(file.written) / one.filename()).string(), sha256_of_file(one)});
  }
}

/// The curves that a passband catalogue names. What is wrong with it is said where it is read.
void add_curves(std::vector<InputChecksum>& list, const InputFile& catalogue) {
  toml::table file;
  try {
    file = toml::parse(read_text_file(catalogue.path), catalogue.path.string());
  } catch (const toml::parse_error&) {
    return;
  }
  const toml::array* entries = file["passband"].as_array();
  if (entries == nullptr) return;
  for (const toml::node& entry : *entries) {
    const toml::table* keys = entry.as_table();
    const auto name = keys != nullptr ? (*keys)["file"].value<std::string>() : std::nullopt;
    if (!name) continue;
    const fs::path curve = catalogue.path.parent_path() / *name;
    std::error_code ignored;
    if (!fs::is_regular_file(curve, ignored)) continue;
    const std::string written = (fs::path(catalogue.written).parent_path() / *name).string();
    const bool listed =
        std::any_of(list.begin(), list.end(), [&](const InputChecksum& one) { return one.file == written; });
    if (!listed) list.push_back({written, sha256_of_file(curve)});
  }
}

}  // namespace

std::vector<InputChecksum> checksums_of_lightcurve_inputs(const RunFile& run) {
  std::vector<InputChecksum> list;
  add(list, run.template_file);
  add(list, run.passband_catalogue);
  add_curves(list, run.passband_catalogue);
  add(list, run.standard_star);
  for (const SurveyInput& survey : run.surveys) {
    add(list, survey.photometry);
    add(list, survey.supernovae);
  }
  add(list, run.milky_way.map_north);
  add(list, run.milky_way.map_south);
  add(list, run.milky_way.map_healpix);
  return list;
}

std::vector<InputChecksum> checksums_of_later_inputs(const RunFile& run) {
  std::vector<InputChecksum> list;
  add(list, run.redshift.velocity_field);
  for (const SystematicInput& systematic : run.systematics) add(list, systematic.file);
  add(list, run.join.calibrators);
  add(list, run.join.covariance);
  return list;
}

std::string digest(const std::vector<InputChecksum>& inputs) {
  std::string all;
  for (const InputChecksum& one : inputs) all += fmt::format("{}\n{}\n", one.file, one.sha256);
  return sha256_of_text(all);
}

}  // namespace thirdrung
