#include "pipeline/scan_stage.h"

#include <fmt/format.h>

#include <algorithm>
#include <map>

#include "hubbleflow/scan_frame.h"
#include "hubbleflow/scans.h"
#include "hubbleflow/variation.h"
#include "pipeline/cut_variations.h"
#include "pipeline/sample_stage.h"
#include "pipeline/scan_tables.h"
#include "pipeline/table_tools.h"

namespace thirdrung {

namespace {

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
  estimate_change_variance(frame, out);
  return out;
}

/// The biases put back that the magnitude limits took off.
Variation without_selection(const ScanFrame& frame, const Magnitudes& magnitudes) {
  Variation out;
  out.setting = "without selection";
  out.supernovae = frame.sample().supernovae;
  out.flow = frame.options().flow;
  for (std::size_t i = 0; i < out.supernovae.size(); ++i)
    out.supernovae[i].m_b_standardised += magnitudes.selection_bias[i];
  estimate_change_variance(frame, out);
  return out;
}

/// @param magnitudes of the frame's supernovae.
std::vector<ScanRow> correction_rows(const RunFile& run, const ScanFrame& frame, const Magnitudes& magnitudes,
                                     const Table& sample, const StandardisationCoefficients& coefficients) {
  const auto rows = rows_in_order(sample, frame.sample().supernovae);
  const auto all = standardisation_data(run, sample, std::vector<bool>(sample.rows(), true));
  std::vector<StandardisationDatum> data;
  data.reserve(rows.size());
  for (const std::size_t row : rows) data.push_back(all[row]);
  const HostMassOptions& mass = run.standardisation.options.host_mass;
  std::vector<ScanRow> out;
  for (const Correction which : {Correction::stretch, Correction::colour, Correction::host_mass})
    out.push_back(scan_variation(frame, without_correction(frame, data, coefficients, mass, which)));
  if (run.redshift.options.velocity != VelocitySource::none)
    out.push_back(scan_variation(frame, without_velocities(frame, sample)));
  const auto is_biased = [](double bias) { return bias != 0.0; };
  if (std::any_of(magnitudes.selection_bias.begin(), magnitudes.selection_bias.end(), is_biased))
    out.push_back(scan_variation(frame, without_selection(frame, magnitudes)));
  for (ScanRow& row : out) row.scan = "corrections";
  return out;
}

std::vector<ScanRow> cut_rows(const RunFile& run, const ScanFrame& wide, const std::vector<bool>& baseline,
                              const Table& sample) {
  const auto subjects = cut_subjects(sample);
  const auto rows = rows_in_order(sample, wide.sample().supernovae);
  std::vector<NamedSubset> subsets;
  for (const CutVariation& variation : cut_variations(run.cuts)) {
    const std::vector<bool> passing = apply_cuts(subjects, cut_rules(variation.limits)).used;
    NamedSubset subset{variation.setting, {}, {}};
    for (const std::size_t row : rows) subset.members.push_back(passing[row]);
    subsets.push_back(std::move(subset));
  }
  return scan_subsets_against(wide, baseline, "cuts", subsets, run.threads);
}

}  // namespace

ScanTables scan_choices(const RunFile& run, const Magnitudes& magnitudes, const CovarianceModel& model,
                        const Table& sample, const StandardisationCoefficients& coefficients) {
  const InterceptOptions& options = run.intercept.options;
  const Magnitudes good = some_of(magnitudes, magnitudes.in_sample);
  const CovarianceModel inner = cut(model, magnitudes.in_sample);
  const ScanFrame frame({good.supernovae, inner.total(), inner.weighting()}, options);
  std::vector<ScanRow> rows, grid, sky;
  for (const ScanAxis& axis : run.scans.axes) {
    ScanAxis seeded = axis;
    if (seeded.seed == 1) seeded.seed = run.seed;
    auto some = run_scan(frame, seeded, run.threads);
    if (axis.kind == ScanKind::sky_halves) sky.insert(sky.end(), some.begin(), some.end());
    auto& into = axis.kind == ScanKind::z_grid ? grid : rows;
    into.insert(into.end(), std::make_move_iterator(some.begin()), std::make_move_iterator(some.end()));
  }
  if (run.scans.corrections) {
    for (ScanRow& row : correction_rows(run, frame, good, sample, coefficients)) rows.push_back(std::move(row));
  }
  if (run.scans.cuts) {
    const ScanFrame wide({magnitudes.supernovae, model.total(), model.weighting()}, options);
    std::vector<bool> baseline = in_redshift_range(magnitudes.supernovae, options.z_min, options.z_max);
    for (std::size_t i = 0; i < baseline.size(); ++i) baseline[i] = baseline[i] && magnitudes.in_sample[i];
    for (ScanRow& row : cut_rows(run, wide, baseline, sample)) rows.push_back(std::move(row));
  }
  return {scans_table(rows), zrange_grid_table(grid), sky_halves_table(sky)};
}

}  // namespace thirdrung
