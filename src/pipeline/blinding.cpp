#include "pipeline/blinding.h"

#include <fmt/chrono.h>
#include <fmt/format.h>

#include <ctime>
#include <nlohmann/json.hpp>

#include "base/atomic_file.h"
#include "base/text.h"
#include "pipeline/inputs.h"

namespace thirdrung {

namespace fs = std::filesystem;
using nlohmann::json;

namespace {

constexpr double largest_offset = 0.02;
constexpr double largest_magnitude = 0.1;

/// Even between -1 and 1, fixed by the text.
double drawn_from(const std::string& text) {
  const std::string hash = sha256_of_text(text);
  const double unit = static_cast<double>(std::stoull(hash.substr(0, 13), nullptr, 16)) / 4503599627370496.0;  // 2^52
  return 2.0 * unit - 1.0;
}

fs::path record_file(const fs::path& folder) {
  return folder / "unblinding.json";
}

std::string digest_of_all(const RunFile& run) {
  auto inputs = checksums_of_lightcurve_inputs(run);
  for (const InputChecksum& one : checksums_of_later_inputs(run)) inputs.push_back(one);
  return digest(inputs);
}

}  // namespace

double hidden_offset(const std::string& phrase) {
  return largest_offset * drawn_from("thirdrung blind offset: " + phrase);
}

double hidden_magnitude(const std::string& phrase) {
  return largest_magnitude * drawn_from("thirdrung blind magnitude: " + phrase);
}

std::optional<Unblinding> read_unblinding(const fs::path& folder) {
  const fs::path file = record_file(folder);
  std::error_code ignored;
  if (!fs::exists(file, ignored)) return std::nullopt;
  const json root = json::parse(read_text_file(file), nullptr, false);
  try {
    return Unblinding{root.at("by").get<std::string>(), root.at("when").get<std::string>(),
                      root.at("run_file_sha256").get<std::string>(), root.at("inputs").get<std::string>()};
  } catch (const json::exception&) {
    throw InputError({file.string(), std::nullopt, ""}, "is not a record of unblinding",
                     "restore it; results stay blind without it");
  }
}

Unblinding unblind(const RunFile& run, const std::string& by) {
  if (!run.blind) {
    throw InputError({run.path.string(), std::nullopt, "blind"}, "this run is not blind",
                     "there is nothing to unblind");
  }
  if (const auto earlier = read_unblinding(run.output)) {
    throw InputError({run.output.string(), std::nullopt, ""},
                     fmt::format("was unblinded on {} by {}", earlier->when, earlier->by),
                     "there is nothing to unblind");
  }
  const std::time_t now = std::time(nullptr);
  Unblinding record{by, fmt::format("{:%Y-%m-%dT%H:%M:%SZ}", fmt::gmtime(now)), sha256_of_text(run.text),
                    digest_of_all(run)};
  const json root = {
      {"by", record.by}, {"when", record.when}, {"run_file_sha256", record.run_file_sha256}, {"inputs", record.inputs}};
  write_file_atomically(record_file(run.output), root.dump(1) + "\n");
  return record;
}

bool is_blind(const RunFile& run) {
  return run.blind && !read_unblinding(run.output);
}

double offset_in_force(const RunFile& run) {
  return is_blind(run) ? hidden_offset(run.phrase) : 0.0;
}

double magnitude_in_force(const RunFile& run) {
  return is_blind(run) ? hidden_magnitude(run.phrase) : 0.0;
}

}  // namespace thirdrung
