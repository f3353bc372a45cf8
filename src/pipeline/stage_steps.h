#pragma once

#include <functional>
#include <string>
#include <vector>

#include "pipeline/output_folder.h"
#include "pipeline/run_file.h"
#include "pipeline/run_stages.h"

namespace thirdrung {

/// What every stage works with.
struct StageContext {
  const RunFile& run;
  OutputFolder& folder;
  std::string lightcurve_inputs;  ///< Digest of the files that light curves depend on.
  std::string all_inputs;         ///< Digest of every input file.
  double hidden_offset = 0.0;     ///< Of a blind run, in a_B,
  double hidden_magnitude = 0.0;  ///< and in the magnitudes of calibrators [mag].
};

/// How one stage is done.
struct StageStep {
  std::function<bool(const RunFile&)> wanted;
  /// Text that changes with anything the result depends on.
  std::function<std::string(const StageContext&)> depends_on;
  /// Does it; returns the names of the files written.
  std::function<std::vector<std::string>(const StageContext&, const std::string& key)> make;
  std::function<void(const StageContext&)> clean_up;  ///< Once the result is noted; may be empty.
};

StageStep step_of(Stage stage);

// The single stages; stage_steps.cpp and stage_steps_later.cpp.
StageStep light_curves_step();
StageStep sample_step();
StageStep standardisation_step();
StageStep systematics_step();
StageStep intercept_step();
StageStep scans_step();
StageStep join_step();

/// The table that an earlier stage left. Throws InputError that says which command makes it.
Table stage_table(const StageContext& context, const std::string& file, const std::string& command);
/// Throws the same if the file is absent.
void stage_file(const StageContext& context, const std::string& file, const std::string& command);
/// SHA-256 of a file of the folder, "" if it is absent.
std::string content_of(const StageContext& context, const std::string& file);
/// The normal forms of sections of the run file, in one text.
std::string settings_of(const RunFile& run, std::initializer_list<const char*> sections);
/// Writes `name`.ecsv, and `name`.fits if `fits`; adds them to `files`.
void write_result(const StageContext& context, const Table& table, const std::string& name,
                  std::vector<std::string>& files, bool fits = false);

}  // namespace thirdrung
