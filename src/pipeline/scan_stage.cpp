#include "pipeline/scan_stage.h"

#include <fmt/format.h>

#include <cmath>
#include <map>

#include "hubbleflow/scan_frame.h"
#include "hubbleflow/scans.h"
#include "hubbleflow/variation.h"
#include "pipeline/cut_variations.h"
#include "pipeline/sample_stage.h"
#include "pipeline/table_tools.h"

namespace thirdrung {

namespace {

Table scans_table(const std::vector<ScanRow>& rows) {
  std::vector<std::string> scan, setting, caution;
  std::vector<std::int64_t> supernovae;
  std::vector<double> a_b, a_b_error, delta, delta_error;
  for (const ScanRow& row : rows) {
    scan.push_back(row.scan);
    setting.push_back(row.setting);
    supernovae.push_back(static_cast<std::int64_t>(row.supernovae));
    a_b.push_back(row.a_b);
    a_b_error.push_back(row.a_b_error);
    delta.push_back(row.delta_ab);
    delta_error.push_back(row.delta_ab_error);
    caution.push_back(row.caution);
  }
  Table out;
  out.add_strings("scan", std::move(scan)).add_strings("setting", std::move(setting));
  out.add_integers("supernovae", std::move(supernovae));
  out.add_reals("a_b", std::move(a_b)).add_reals("a_b_error", std::move(a_b_error));
  out.add_reals("delta_ab", std::move(delta), "", "against the baseline");
  out.add_reals("delta_ab_error", std::move(delta_error), "", "of that difference, in the joint covariance");
  out.add_strings("caution", std::move(caution));
  return out;
}

Table grid_table(const std::vector<ScanRow>& rows) {
  std::vector<double> z_min, z_max, delta, error;
  std::vector<std::int64_t> supernovae;
  for (const ScanRow& row : rows) {
    z_min.push_back(row.coordinates.at(0));
    z_max.push_back(row.coordinates.at(1));
    supernovae.push_back(static_cast<std::int64_t>(row.supernovae));
    delta.push_back(row.delta_ab);
    error.push_back(row.delta_ab_error);
  }
  Table out;
  out.add_reals("z_min", std::move(z_min)).add_reals("z_max", std::move(z_max));
  out.add_integers("supernovae", std::move(supernovae));
  out.add_reals("delta_ab", std::move(delta), "", "against the baseline");
  out.add_reals("delta_ab_error", std::move(error), "", "of that difference");
  return out;
}

/// Rows of the sample in the order of the supernovae.
std::vector<std::size_t> rows_in_order(const Table& sample, const std::vector<FlowSupernova>& supernovae) {
  std::map<std::string, std::size_t> place;
  const auto names = sample.strings("supernova");
  for (std::size_t i = 0; i < names.size(); ++i) place[names[i]] = i;
  std::vector<std::size_t> out;
  for (const FlowSupernova& one : supernovae) {
    const auto found = place.find(one.name);
    if (found == place.end())
      throw InputError(sample.place("supernova"), fmt::format("the sample lacks {}", one.name),
                       "make the magnitudes again from this sample");
    out.push_back(found->second);
  }
  return out;
}

Variation without_velocities(const ScanFrame& frame, const Table& sample) {
  Variation out;
  out.scan = "corrections";
  out.setting = "no peculiar velocities";
  out.supernovae = frame.sample().supernovae;
  out.flow = frame.options().flow;
  const auto z_cmb = sample.reals("z_cmb");
  const auto rows = rows_in_order(sample, out.supernovae);
  for (std::size_t i = 0; i < rows.size(); ++i) out.supernovae[i].z_flow = z_cmb[rows[i]];
  return out;
}

std::vector<ScanRow> correction_rows(const RunFile& run, const ScanFrame& frame, const Table& sample,
                                     const StandardisationCoefficients& coefficients) {
  const auto rows = rows_in_order(sample, frame.sample().supernovae);
  const auto all = standardisation_data(run, sample, std::vector<bool>(sample.rows(), true));
  std::vector<StandardisationDatum> data;
  for (const std::size_t row : rows) data.push_back(all[row]);
  const HostMassOptions& mass = run.standardisation.options.host_mass;
  std::vector<ScanRow> out;
  for (const Correction which : {Correction::stretch, Correction::colour, Correction::host_mass})
    out.push_back(scan_variation(frame, without_correction(frame, data, coefficients, mass, which)));
  if (run.redshift.options.velocity != VelocitySource::none)
    out.push_back(scan_variation(frame, without_velocities(frame, sample)));
  for (ScanRow& row : out) row.scan = "corrections";
  return out;
}

std::vector<ScanRow> cut_rows(const RunFile& run, const ScanFrame& wide, const std::vector<bool>& baseline,
                              const Table& sample) {
  const auto subjects = cut_subjects(sample);
  const auto rows = rows_in_order(sample, wide.sample().supernovae);
  std::vector<ScanRow> out;
  for (const CutVariation& variation : cut_variations(run.cuts)) {
    const std::vector<bool> passing = apply_cuts(subjects, cut_rules(variation.limits)).used;
    std::vector<bool> members;
    for (const std::size_t row : rows) members.push_back(passing[row]);
    if (members == baseline) continue;
    const auto count = static_cast<std::size_t>(std::count(members.begin(), members.end(), true));
    if (count < run.intercept.options.fewest) continue;
    ScanRow row = difference_of(wide, "cuts", variation.setting, members, baseline);
    const Eigen::VectorXd weights = wide.weights(members);
    row.supernovae = count;
    row.a_b = wide.estimate(weights);
    row.a_b_error = wide.error_of(weights);
    out.push_back(std::move(row));
  }
  return out;
}

}  // namespace

ScanTables scan_choices(const RunFile& run, const Magnitudes& magnitudes, const CovarianceModel& model,
                        const Table& sample, const StandardisationCoefficients& coefficients) {
  const InterceptOptions& options = run.intercept.options;
  const Magnitudes good = some_of(magnitudes, magnitudes.in_sample);
  const CovarianceModel inner = cut(model, magnitudes.in_sample);
  const ScanFrame frame({good.supernovae, inner.total(), inner.weighting()}, options);
  std::vector<ScanRow> rows, grid;
  for (const ScanAxis& axis : run.scans.axes) {
    ScanAxis seeded = axis;
    if (seeded.seed == 1) seeded.seed = run.seed;
    auto some = run_scan(frame, seeded, run.threads);
    auto& into = axis.kind == ScanKind::z_grid ? grid : rows;
    into.insert(into.end(), std::make_move_iterator(some.begin()), std::make_move_iterator(some.end()));
  }
  if (run.scans.corrections) {
    for (ScanRow& row : correction_rows(run, frame, sample, coefficients)) rows.push_back(std::move(row));
  }
  if (run.scans.cuts) {
    const ScanFrame wide({magnitudes.supernovae, model.total(), model.weighting()}, options);
    std::vector<bool> baseline = in_redshift_range(magnitudes.supernovae, options.z_min, options.z_max);
    for (std::size_t i = 0; i < baseline.size(); ++i) baseline[i] = baseline[i] && magnitudes.in_sample[i];
    for (ScanRow& row : cut_rows(run, wide, baseline, sample)) rows.push_back(std::move(row));
  }
  return {scans_table(rows), grid_table(grid)};
}

}  // namespace thirdrung
