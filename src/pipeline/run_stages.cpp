#include "pipeline/run_stages.h"

#include <fmt/format.h>

#include <array>

#include "base/error.h"
#include "base/parallel.h"
#include "base/text.h"
#include "pipeline/blinding.h"
#include "pipeline/calibrators.h"
#include "pipeline/check.h"
#include "pipeline/inputs.h"
#include "pipeline/output_folder.h"
#include "pipeline/stage_steps.h"
#include "pipeline/summary.h"
#include "pipeline/version.h"

namespace thirdrung {

namespace {

constexpr std::array<Stage, 7> all_stages = {Stage::light_curves, Stage::sample,    Stage::standardisation,
                                             Stage::systematics,  Stage::intercept, Stage::scans,
                                             Stage::join};

std::vector<Stage> stages_between(const RunOptions& options) {
  std::vector<Stage> out;
  for (const Stage stage : all_stages) {
    if (stage >= options.first && stage <= options.last) out.push_back(stage);
  }
  return out;
}

/// Forgets a stage and everything after it.
void drop_from(OutputFolder& folder, Stage first) {
  for (const Stage stage : all_stages) {
    if (stage >= first) folder.drop(name_of(stage));
  }
  std::error_code ignored;
  for (const char* file : {"summary.json", "provenance.json"}) std::filesystem::remove(folder.path() / file, ignored);
}

void do_stage(const StageContext& context, Stage stage, const RunOptions& options) {
  const StageStep step = step_of(stage);
  const auto say = [&](const std::string& what) {
    if (options.say) options.say(name_of(stage), what);
  };
  if (!step.wanted(context.run)) {
    if (context.folder.stages().contains(name_of(stage))) drop_from(context.folder, stage);
    return;
  }
  const std::string key = sha256_of_text(program_version() + "\n" + name_of(stage) + "\n" + step.depends_on(context));
  if (!options.again && context.folder.is_finished(name_of(stage), key)) return say("kept from before");
  drop_from(context.folder, stage);
  if (stop_requested()) throw Interrupted("stopped on request");
  say("");
  const auto files = step.make(context, key);
  context.folder.finish(name_of(stage), key, files);
  if (step.clean_up) step.clean_up(context);
}

}  // namespace

std::string name_of(Stage stage) {
  switch (stage) {
    case Stage::light_curves:
      return "light curves";
    case Stage::sample:
      return "redshifts and cuts";
    case Stage::standardisation:
      return "standardisation";
    case Stage::systematics:
      return "systematics";
    case Stage::intercept:
      return "intercept";
    case Stage::scans:
      return "scans";
    case Stage::join:
      return "join";
  }
  return "";
}

void run_stages(const RunFile& run, const RunOptions& options) {
  const auto inputs_of_fits = checksums_of_lightcurve_inputs(run);
  // Said now rather than after the light curves.
  if (!run.systematics.empty()) check_systematics(run, read_catalogue(run));
  auto inputs = inputs_of_fits;
  for (const InputChecksum& one : checksums_of_later_inputs(run)) inputs.push_back(one);
  check_calibrators(run);
  OutputFolder folder(run.output);
  if (options.afresh)
    folder.clear();
  else
    folder.refuse_changed_inputs(inputs);
  folder.remember_inputs(inputs);
  const StageContext context{
      run, folder, digest(inputs_of_fits), digest(inputs), offset_in_force(run), magnitude_in_force(run)};
  for (const Stage stage : stages_between(options)) do_stage(context, stage, options);
  write_summary(run, folder, inputs);
}

}  // namespace thirdrung
