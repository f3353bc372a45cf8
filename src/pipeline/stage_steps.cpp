#include "pipeline/stage_steps.h"

#include <fmt/format.h>

#include <stdexcept>

#include "base/error.h"
#include "base/text.h"
#include "pipeline/covariance_stage.h"
#include "pipeline/fields.h"
#include "pipeline/lightcurve_stage.h"
#include "pipeline/sample_stage.h"
#include "pipeline/standardisation_stage.h"
#include "tables/read_write.h"

namespace thirdrung {

namespace fs = std::filesystem;

namespace {

bool always(const RunFile&) {
  return true;
}

}  // namespace

StageStep step_of(Stage stage) {
  switch (stage) {
    case Stage::light_curves:
      return light_curves_step();
    case Stage::sample:
      return sample_step();
    case Stage::standardisation:
      return standardisation_step();
    case Stage::systematics:
      return systematics_step();
    case Stage::intercept:
      return intercept_step();
    case Stage::scans:
      return scans_step();
    case Stage::join:
      return join_step();
  }
  throw std::logic_error("no such stage");
}

void stage_file(const StageContext& context, const std::string& file, const std::string& command) {
  const fs::path path = context.folder.path() / file;
  std::error_code ignored;
  if (!fs::exists(path, ignored)) {
    throw InputError({path.string(), std::nullopt, ""}, "is not there yet",
                     fmt::format("make it with `thirdrung {} {}`", command, context.run.path.string()));
  }
}

Table stage_table(const StageContext& context, const std::string& file, const std::string& command) {
  stage_file(context, file, command);
  return read_table(context.folder.path() / file);
}

std::string content_of(const StageContext& context, const std::string& file) {
  const fs::path path = context.folder.path() / file;
  std::error_code ignored;
  return fs::exists(path, ignored) ? sha256_of_file(path) : std::string();
}

std::string settings_of(const RunFile& run, std::initializer_list<const char*> sections) {
  std::string out;
  for (const char* section : sections) out += fmt::format("[{}]\n{}\n", section, run.sections.at(section));
  return out;
}

void write_result(const StageContext& context, const Table& table, const std::string& name,
                  std::vector<std::string>& files, bool fits) {
  write_table(table, context.folder.path() / (name + ".ecsv"));
  files.push_back(name + ".ecsv");
  if (!fits) return;
  write_table(table, context.folder.path() / (name + ".fits"));
  files.push_back(name + ".fits");
}

StageStep light_curves_step() {
  StageStep step;
  step.wanted = always;
  step.depends_on = [](const StageContext& context) {
    // The first words change with what the stage makes: results of an older program are made again.
    return "light curves 2\n" + settings_of(context.run, {"survey", "milky_way", "lightcurve"}) +
           fmt::format("curves {}\n", context.run.report.light_curves) + context.lightcurve_inputs;
  };
  step.make = [](const StageContext& context, const std::string& key) {
    const LightCurveTables tables = fit_light_curves(context.run, context.folder.resume_folder(), key);
    std::vector<std::string> files;
    write_result(context, tables.fits, "lightcurve-fits", files);
    if (tables.points.rows() > 0) write_result(context, tables.points, "lightcurve-points", files);
    if (tables.curves.rows() > 0) write_result(context, tables.curves, "lightcurve-curves", files);
    write_result(context, tables.set_aside, "set-aside", files);
    write_result(context, tables.error_factors, "error-factors", files);
    return files;
  };
  step.clean_up = [](const StageContext& context) { remove_chunks(context.folder.resume_folder()); };
  return step;
}

StageStep sample_step() {
  StageStep step;
  step.wanted = always;
  step.depends_on = [](const StageContext& context) {
    return settings_of(context.run, {"survey", "milky_way", "redshift", "cuts", "intercept", "standardisation"}) +
           content_of(context, "lightcurve-fits.ecsv") + context.all_inputs;
  };
  step.make = [](const StageContext& context, const std::string&) {
    const SampleTables tables = make_sample(context.run, stage_table(context, "lightcurve-fits.ecsv", "fit"));
    std::vector<std::string> files;
    write_result(context, tables.sample, "sample", files, true);
    write_result(context, tables.cuts, "cuts", files);
    const Table fields = velocity_on_the_sky(context.run);
    if (fields.rows() > 0) write_result(context, fields, "fields", files);
    return files;
  };
  return step;
}

StageStep standardisation_step() {
  StageStep step;
  step.wanted = always;
  step.depends_on = [](const StageContext& context) {
    return settings_of(context.run, {"standardisation", "selection", "intercept", "cuts", "scans"}) +
           content_of(context, "sample.ecsv") + fmt::format("\n{}", context.hidden_offset);
  };
  step.make = [](const StageContext& context, const std::string&) {
    const StandardisationTables tables =
        standardise_sample(context.run, stage_table(context, "sample.ecsv", "select"), context.hidden_offset);
    std::vector<std::string> files;
    write_result(context, tables.magnitudes, "magnitudes", files);
    write_result(context, tables.parameters, "standardisation", files);
    write_coefficient_covariance({tables.names, tables.covariance},
                                 context.folder.path() / "standardisation-covariance.fits");
    files.emplace_back("standardisation-covariance.fits");
    return files;
  };
  return step;
}

}  // namespace thirdrung
