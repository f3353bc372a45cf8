#pragma once

#include <filesystem>
#include <map>
#include <string>
#include <vector>

#include "pipeline/inputs.h"

namespace thirdrung {

/// What a finished stage left in the output folder.
struct StageRecord {
  std::string key;                           ///< Of everything that the stage depends on.
  std::map<std::string, std::string> files;  ///< Names within the folder, and their SHA-256.
};

/// The output folder of a run: locked against a second run, with a memory of the stages that are finished.
///
/// The memory is `resume/stages.json` in the folder. A stage counts as finished if its key is the one wanted and every
/// file it wrote is still there with the content it had.
class OutputFolder {
 public:
  /// Makes the folder if it is absent. Throws OutputError if it cannot be made or written, or if another run holds it.
  explicit OutputFolder(std::filesystem::path path);
  ~OutputFolder();
  OutputFolder(const OutputFolder&) = delete;
  OutputFolder& operator=(const OutputFolder&) = delete;

  const std::filesystem::path& path() const { return path_; }
  std::filesystem::path resume_folder() const { return path_ / "resume"; }

  bool is_finished(const std::string& stage, const std::string& key) const;
  /// Notes the stage as finished, with the files that it wrote.
  void finish(const std::string& stage, const std::string& key, const std::vector<std::string>& files);
  /// Removes the files of a stage and forgets it.
  void drop(const std::string& stage);
  /// Removes everything that runs have left here, finished or not.
  void clear();
  const std::map<std::string, StageRecord>& stages() const { return stages_; }

  /// Throws InputError if an input of an earlier run here has another content now, naming it.
  void refuse_changed_inputs(const std::vector<InputChecksum>& inputs) const;
  /// Notes the inputs that results here come from.
  void remember_inputs(const std::vector<InputChecksum>& inputs);

 private:
  void load();
  void save() const;

  std::filesystem::path path_;
  int lock_ = -1;
  std::map<std::string, StageRecord> stages_;
  std::map<std::string, std::string> inputs_;
  std::string version_;
};

}  // namespace thirdrung
