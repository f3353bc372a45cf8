#include <fmt/format.h>

#include "pipeline/blinding.h"
#include "pipeline/covariance_stage.h"
#include "pipeline/intercept_stage.h"
#include "pipeline/join_stage.h"
#include "pipeline/ladder_stage.h"
#include "pipeline/scan_stage.h"
#include "pipeline/stage_steps.h"
#include "pipeline/standardisation_stage.h"
#include "pipeline/systematics_stage.h"
#include "pipeline/version.h"

namespace thirdrung {

namespace {

constexpr const char* coefficients_file = "standardisation-covariance.fits";
constexpr const char* shifts_file = "systematic-shifts.fits";
constexpr const char* block_file = "ladder-block.fits";

CoefficientCovariance coefficients_in(const StageContext& context) {
  if (content_of(context, coefficients_file).empty()) return {};
  return read_coefficient_covariance(context.folder.path() / coefficients_file);
}

/// The covariance of all rows of the magnitudes.
CovarianceModel covariance_of(const StageContext& context, const Magnitudes& magnitudes) {
  std::vector<std::string> names;
  for (const FlowSupernova& one : magnitudes.supernovae) names.push_back(one.name);
  std::vector<SystematicShift> shifts;
  if (!context.run.systematics.empty()) {
    stage_file(context, shifts_file, "shift");
    shifts = shifts_for(read_shifts(context.folder.path() / shifts_file), names);
  }
  return make_covariance(context.run, magnitudes, coefficients_in(context), std::move(shifts));
}

StandardisationCoefficients coefficients_from(const Table& table) {
  StandardisationCoefficients out;
  const auto names = table.strings("parameter");
  const auto values = table.reals("value");
  for (std::size_t i = 0; i < names.size(); ++i) {
    if (names[i] == "alpha") out.alpha = values[i];
    if (names[i] == "beta") out.beta = values[i];
    if (names[i] == "gamma") out.gamma = values[i];
    if (names[i] == "sigma_int") out.sigma_int = values[i];
  }
  return out;
}

LadderInput ladder_input(const StageContext& context) {
  LadderInput out;
  out.sample = stage_table(context, "sample.ecsv", "select");
  if (!content_of(context, "set-aside.ecsv").empty()) out.set_aside = stage_table(context, "set-aside.ecsv", "fit");
  out.magnitudes = read_magnitudes(stage_table(context, "magnitudes.ecsv", "standardise"));
  out.coefficients = coefficients_from(stage_table(context, "standardisation.ecsv", "standardise"));
  out.coefficient_covariance = coefficients_in(context);
  if (!context.run.systematics.empty()) {
    stage_file(context, shifts_file, "shift");
    out.shifts = read_shifts(context.folder.path() / shifts_file);
  }
  out.hidden_magnitude = context.hidden_magnitude;
  return out;
}

/// Everything that the covariance depends on.
std::string covariance_depends_on(const StageContext& context) {
  return settings_of(context.run, {"intercept", "redshift"}) + content_of(context, "magnitudes.ecsv") +
         content_of(context, coefficients_file) + content_of(context, shifts_file);
}

/// What the shift of every moved input depends on, whatever the others are.
std::string every_shift_depends_on(const StageContext& context) {
  return settings_of(context.run, {"survey", "milky_way", "lightcurve", "redshift", "cuts", "intercept",
                                   "standardisation", "selection"}) +
         context.all_inputs + content_of(context, "lightcurve-fits.ecsv") + content_of(context, "sample.ecsv") +
         content_of(context, "magnitudes.ecsv");
}

}  // namespace

StageStep systematics_step() {
  StageStep step;
  step.wanted = [](const RunFile& run) { return !run.systematics.empty(); };
  step.depends_on = [](const StageContext& context) {
    return settings_of(context.run, {"systematic"}) + every_shift_depends_on(context);
  };
  step.make = [](const StageContext& context, const std::string&) {
    // Not on the list of systematics: what one of them has shifted stays when another is added.
    const SavedShifts saved(context.folder.resume_folder(), program_version() + "\n" + every_shift_depends_on(context));
    const SystematicShifts shifts = find_systematic_shifts(
        context.run, stage_table(context, "lightcurve-fits.ecsv", "fit"), stage_table(context, "sample.ecsv", "select"),
        stage_table(context, "magnitudes.ecsv", "standardise"), saved);
    write_shifts(shifts, context.folder.path() / shifts_file);
    return std::vector<std::string>{shifts_file};
  };
  step.clean_up = [](const StageContext& context) { SavedShifts::remove_all(context.folder.resume_folder()); };
  return step;
}

StageStep intercept_step() {
  StageStep step;
  step.wanted = [](const RunFile&) { return true; };
  step.depends_on = covariance_depends_on;
  step.make = [](const StageContext& context, const std::string&) {
    const Magnitudes all = read_magnitudes(stage_table(context, "magnitudes.ecsv", "standardise"));
    const Magnitudes sample = some_of(all, all.in_sample);
    const CovarianceModel model = covariance_of(context, sample);
    const InterceptTables tables = fit_intercept_of(context.run, sample, model);
    std::vector<std::string> files;
    write_result(context, tables.intercept, "intercept", files);
    write_result(context, tables.standardised, "standardised", files, true);
    write_result(context, tables.influence, "influence", files);
    write_result(context, tables.budget, "budget", files);
    if (tables.derivatives.rows() > 0) write_result(context, tables.derivatives, "calibration-derivatives", files);
    write_covariance(model, context.folder.path() / "covariance.fits");
    files.emplace_back("covariance.fits");
    return files;
  };
  return step;
}

StageStep scans_step() {
  StageStep step;
  step.wanted = [](const RunFile& run) { return run.scans.wanted; };
  step.depends_on = [](const StageContext& context) {
    return settings_of(context.run, {"scans", "cuts", "standardisation"}) + covariance_depends_on(context) +
           content_of(context, "sample.ecsv") + fmt::format("\nseed {}", context.run.seed);
  };
  step.make = [](const StageContext& context, const std::string&) {
    const Magnitudes all = read_magnitudes(stage_table(context, "magnitudes.ecsv", "standardise"));
    const ScanTables tables =
        scan_choices(context.run, all, covariance_of(context, all), stage_table(context, "sample.ecsv", "select"),
                     coefficients_from(stage_table(context, "standardisation.ecsv", "standardise")));
    std::vector<std::string> files;
    write_result(context, tables.scans, "scans", files);
    if (tables.zrange_grid.rows() > 0) write_result(context, tables.zrange_grid, "zrange-grid", files);
    if (tables.sky_halves.rows() > 0) write_result(context, tables.sky_halves, "sky-halves", files);
    return files;
  };
  return step;
}

StageStep join_step() {
  StageStep step;
  step.wanted = [](const RunFile& run) { return run.join.wanted; };
  step.depends_on = [](const StageContext& context) {
    std::string join = settings_of(context.run, {"join"}) + content_of(context, "intercept.ecsv");
    if (!context.run.join.calibrators.given()) return join;
    return join + settings_of(context.run, {"cuts", "standardisation"}) + covariance_depends_on(context) +
           context.all_inputs + content_of(context, "sample.ecsv") + content_of(context, "standardisation.ecsv") +
           content_of(context, "set-aside.ecsv") + fmt::format("\n{}", context.hidden_magnitude);
  };
  step.make = [](const StageContext& context, const std::string&) {
    std::vector<std::string> files;
    if (!context.run.join.calibrators.given()) {
      write_result(context, join_of(context.run, stage_table(context, "intercept.ecsv", "intercept")), "join", files);
      return files;
    }
    const LadderResult result = join_calibrators(context.run, ladder_input(context));
    write_result(context, result.join, "join", files);
    write_result(context, result.calibrators, "calibrators", files);
    write_ladder_block(result.block, result.solution, is_blind(context.run), context.folder.path() / block_file);
    files.emplace_back(block_file);
    return files;
  };
  return step;
}

}  // namespace thirdrung
