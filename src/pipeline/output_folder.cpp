#include "pipeline/output_folder.h"

#include <fcntl.h>
#include <fmt/format.h>
#include <sys/file.h>
#include <unistd.h>

#include <cerrno>
#include <cstring>
#include <nlohmann/json.hpp>

#include "base/atomic_file.h"
#include "base/text.h"
#include "pipeline/version.h"

namespace thirdrung {

namespace fs = std::filesystem;
using nlohmann::json;

OutputFolder::OutputFolder(fs::path path) : path_(std::move(path)) {
  std::error_code error;
  fs::create_directories(resume_folder(), error);
  if (error) {
    throw OutputError(fmt::format("{}: the output folder cannot be made: {}.", path_.string(), error.message()));
  }
  const fs::path lock = resume_folder() / "in-use";
  lock_ = ::open(lock.c_str(), O_RDWR | O_CREAT | O_CLOEXEC, 0644);
  if (lock_ < 0) {
    throw OutputError(fmt::format("{}: cannot be written: {}.", path_.string(), std::strerror(errno)));
  }
  if (::flock(lock_, LOCK_EX | LOCK_NB) != 0) {
    ::close(lock_);
    throw OutputError(
        fmt::format("{}: another run is at work in this folder; wait for it, or give another output in the run file.",
                    path_.string()));
  }
  remove_unfinished(path_);
  remove_unfinished(resume_folder());
  load();
}

OutputFolder::~OutputFolder() {
  if (lock_ >= 0) ::close(lock_);
}

void OutputFolder::load() {
  const fs::path file = resume_folder() / "stages.json";
  version_ = program_version();
  if (!fs::exists(file)) return;
  const json root = json::parse(read_file(file), nullptr, false);
  if (root.is_discarded() || !root.is_object()) return;  // Nothing is known then, and every stage is done again.
  try {
    version_ = root.at("version").get<std::string>();
    for (const auto& [name, stage] : root.at("stages").items()) {
      stages_[name] = {stage.at("key").get<std::string>(), stage.at("files").get<std::map<std::string, std::string>>()};
    }
    inputs_ = root.at("inputs").get<std::map<std::string, std::string>>();
  } catch (const json::exception&) {
    stages_.clear();
    inputs_.clear();
  }
}

void OutputFolder::save() const {
  json root = {{"version", program_version()}, {"stages", json::object()}, {"inputs", inputs_}};
  for (const auto& [name, stage] : stages_) root["stages"][name] = {{"key", stage.key}, {"files", stage.files}};
  write_file_atomically(resume_folder() / "stages.json", root.dump(1) + "\n");
}

bool OutputFolder::is_finished(const std::string& stage, const std::string& key) const {
  const auto found = stages_.find(stage);
  if (found == stages_.end() || found->second.key != key) return false;
  for (const auto& [name, sha256] : found->second.files) {
    const fs::path file = path_ / name;
    std::error_code ignored;
    if (!fs::is_regular_file(file, ignored) || sha256_of_file(file) != sha256) return false;
  }
  return true;
}

void OutputFolder::finish(const std::string& stage, const std::string& key, const std::vector<std::string>& files) {
  StageRecord record{key, {}};
  for (const std::string& name : files) record.files[name] = sha256_of_file(path_ / name);
  stages_[stage] = std::move(record);
  save();
}

void OutputFolder::drop(const std::string& stage) {
  const auto found = stages_.find(stage);
  if (found == stages_.end()) return;
  std::error_code ignored;
  for (const auto& [name, sha256] : found->second.files) fs::remove(path_ / name, ignored);
  stages_.erase(found);
  save();
}

void OutputFolder::clear() {
  while (!stages_.empty()) drop(stages_.begin()->first);
  inputs_.clear();
  version_ = program_version();
  std::error_code ignored;
  for (const auto& entry : fs::directory_iterator(resume_folder())) {
    if (entry.path().filename() != "in-use") fs::remove(entry.path(), ignored);
  }
}

void OutputFolder::refuse_changed_inputs(const std::vector<InputChecksum>& inputs) const {
  const std::string remedy = "give another output, or replace what is there with --afresh";
  if (stages_.empty()) return;  // Nothing to mix with; what a killed run saved is told apart by its key.
  if (version_ != program_version()) {
    throw InputError({path_.string(), std::nullopt, ""},
                     fmt::format("holds results of {}, and this is {}", version_, program_version()), remedy);
  }
  for (const InputChecksum& input : inputs) {
    const auto found = inputs_.find(input.file);
    if (found == inputs_.end() || found->second == input.sha256) continue;
    throw InputError({path_.string(), std::nullopt, ""},
                     fmt::format("holds results made before {} changed, and old and new would be mixed", input.file),
                     remedy);
  }
}

void OutputFolder::remember_inputs(const std::vector<InputChecksum>& inputs) {
  inputs_.clear();
  for (const InputChecksum& input : inputs) inputs_[input.file] = input.sha256;
  save();
}

}  // namespace thirdrung
