#include "pipeline/standardisation_stage.h"

#include <fmt/format.h>

#include <cmath>

#include "base/error.h"
#include "pipeline/calibrators.h"
#include "pipeline/sample_stage.h"
#include "pipeline/table_tools.h"
#include "standardisation/ordinary.h"

namespace thirdrung {

namespace {

double modulus(double z_flow, double z_helio, const FlowOptions& flow) {
  const double factor = flow.helio_factor ? 5.0 * std::log10((1.0 + z_helio) / (1.0 + z_flow)) : 0.0;
  return 5.0 * log_expansion_term(z_flow, flow.expansion) + factor;
}

std::vector<bool> both(const std::vector<bool>& a, const std::vector<bool>& b) {
  std::vector<bool> out(a.size());
  for (std::size_t i = 0; i < a.size(); ++i) out[i] = a[i] && b[i];
  return out;
}

std::vector<bool> passing(const std::vector<CutSubject>& subjects, const CutLimits& limits) {
  return apply_cuts(subjects, cut_rules(limits)).used;
}

/// No limit but the redshifts that scans reach, and a fit that is trusted if the run asks for it.
CutLimits widest(const RunFile& run) {
  CutLimits limits{.z_min = run.scans.z_min,
                   .z_max = run.scans.z_max,
                   .trusted = run.cuts.trusted,
                   .c_max = {},
                   .s_min = {},
                   .s_max = {},
                   .s_error_max = {},
                   .c_error_max = {},
                   .m_b_error_max = {},
                   .t_0_error_max = {},
                   .first_phase_max = {},
                   .last_phase_min = {},
                   .mw_ebv_max = {},
                   .fit_probability_min = {},
                   .bands_min = {},
                   .epochs_min = {},
                   .host_log_mass_min = {},
                   .host_log_mass_max = {},
                   .host_mass = false};
  if (!run.scans.wanted) limits.z_min = run.intercept.options.z_min, limits.z_max = run.intercept.options.z_max;
  return limits;
}

Table parameters_table(const StandardisationResult& result, double hidden_offset) {
  std::vector<std::string> names;
  std::vector<double> values, errors;
  std::vector<bool> held;
  for (const StandardisationParameter& one : result.parameters) {
    names.push_back(one.name);
    values.push_back(one.name == "intercept" ? one.value - 5.0 * hidden_offset : one.value);
    errors.push_back(one.error);
    held.push_back(one.held);
  }
  Table table;
  table.add_strings("parameter", std::move(names));
  table.add_reals("value", std::move(values));
  table.add_reals("error", std::move(errors), "", "1 sigma; 0 if held");
  table.add_flags("held", std::move(held), "not fitted");
  table.set_meta("supernovae", fmt::format("{}", result.supernovae));
  table.set_meta("chi2", fmt::format("{}", result.chi2));
  table.set_meta("minus_two_ln_likelihood", fmt::format("{}", result.minus_two_ln_likelihood));
  for (std::size_t i = 0; i < result.remarks.size(); ++i)
    table.set_meta(fmt::format("remark_{}", i + 1), result.remarks[i]);
  return table;
}

Table magnitudes_table(const Table& chosen, const std::vector<StandardisedMagnitude>& magnitudes,
                       const std::vector<bool>& in_sample, double hidden_offset) {
  std::vector<double> magnitude, error, fit, intrinsic, probability;
  for (const StandardisedMagnitude& one : magnitudes) {
    magnitude.push_back(one.magnitude - 5.0 * hidden_offset);
    error.push_back(std::sqrt(one.variance()));
    fit.push_back(one.fit_variance);
    intrinsic.push_back(one.intrinsic_variance);
    probability.push_back(one.mass_probability);
  }
  Table table;
  for (const char* name : {"supernova", "surveys", "ra", "dec", "z_helio", "z_helio_error", "z_flow", "s", "c",
                           "host_log_mass", "host_log_mass_error", "t_0"})
    table.add(chosen.column(name));
  table.add_reals("host_mass_probability", std::move(probability), "", "that the mass is above the step");
  table.add_reals("m_b_standardised", std::move(magnitude), "mag", "m_b + alpha (s - 1) - beta c + gamma (P - 1/2)");
  table.add_reals("m_b_standardised_error", std::move(error), "mag", "of the fit and the intrinsic scatter");
  table.add_reals("fit_variance", std::move(fit), "mag2", "from the light-curve fit");
  table.add_reals("intrinsic_variance", std::move(intrinsic), "mag2", "intrinsic scatter and host-mass step");
  table.add_flags("in_sample", in_sample, "passes every rule but perhaps the redshift range");
  return table;
}

void add_selection_bias(Table& table, const std::vector<StandardisedMagnitude>& magnitudes) {
  std::vector<double> bias;
  bias.reserve(magnitudes.size());
  for (const StandardisedMagnitude& one : magnitudes) bias.push_back(one.selection_bias);
  table.add_reals("selection_bias", std::move(bias), "mag", "by the magnitude limit, taken off m_b_standardised");
}

}  // namespace

std::vector<StandardisationDatum> standardisation_data(const RunFile& run, const Table& sample,
                                                       const std::vector<bool>& keep) {
  const auto name = sample.strings("supernova"), surveys = sample.strings("surveys");
  const auto m_b = sample.reals_in("m_b", "mag"), s = sample.reals("s"), c = sample.reals_in("c", "mag");
  const auto m_b_error = sample.reals_in("m_b_error", "mag"), s_error = sample.reals("s_error"),
             c_error = sample.reals_in("c_error", "mag");
  const auto mb_s = sample.reals_in("cov_mb_s", "mag"), mb_c = sample.reals_in("cov_mb_c", "mag2"),
             s_c = sample.reals_in("cov_s_c", "mag");
  const auto mass = sample.reals_in("host_log_mass", "dex"), mass_error = sample.reals_in("host_log_mass_error", "dex");
  const auto z_helio = sample.reals("z_helio"), z_flow = sample.reals("z_flow"), z_error = sample.reals("z_flow_error");
  std::vector<StandardisationDatum> data;
  for (std::size_t i = 0; i < sample.rows(); ++i) {
    if (!keep[i]) continue;
    StandardisationDatum one;
    one.name = name[i];
    one.surveys = split_list(surveys[i], ",");
    one.m_b = m_b[i];
    one.s = s[i];
    one.c = c[i];
    one.covariance << m_b_error[i] * m_b_error[i], mb_s[i], mb_c[i], mb_s[i], s_error[i] * s_error[i], s_c[i], mb_c[i],
        s_c[i], c_error[i] * c_error[i];
    one.host_log_mass = mass[i];
    one.host_log_mass_error = mass_error[i];
    one.z_helio = z_helio[i];
    one.z_flow = z_flow[i];
    one.modulus = modulus(z_flow[i], z_helio[i], run.intercept.options.flow);
    one.flow_variance = flow_variance(z_flow[i], 0.0, z_error[i]);  // z_flow_error has the velocity scatter in it.
    data.push_back(std::move(one));
  }
  return data;
}

StandardisationResult fit_standardisation(const RunFile& run, const std::vector<StandardisationDatum>& data) {
  const HostMassOptions& mass = run.standardisation.options.host_mass;
  const StandardisationFit fit = [&](std::span<const StandardisationDatum> some) {
    if (run.standardisation.ordinary) return fit_ordinary(some, {mass, 200});
    return fit_hierarchical(some, run.standardisation.options);
  };
  return run.magnitude_limits.empty() ? fit(data) : fit_selected(data, mass, run.magnitude_limits, fit);
}

StandardisationTables standardise_sample(const RunFile& run, const Table& sample, double hidden_offset) {
  const auto used = sample.flags("used");
  const auto fit_data = standardisation_data(run, sample, used);
  if (fit_data.size() < run.intercept.options.fewest) {
    throw NoResultError(
        fmt::format("{} of {} supernovae are left after the cuts, and {} are needed; cuts.ecsv says what each rule "
                    "removes.",
                    fit_data.size(), sample.rows(), run.intercept.options.fewest));
  }
  const StandardisationResult result = fit_standardisation(run, fit_data);
  const auto subjects = cut_subjects(sample);
  CutLimits quality = run.cuts;
  const CutLimits wide = widest(run);
  quality.z_min = wide.z_min;
  quality.z_max = wide.z_max;
  std::vector<bool> chosen = passing(subjects, wide);
  const std::vector<bool> calibrator = calibrator_rows(sample);
  for (std::size_t i = 0; i < chosen.size(); ++i) chosen[i] = chosen[i] && !calibrator[i];
  const std::vector<bool> good = both(chosen, passing(subjects, quality));
  std::vector<bool> in_sample;
  for (std::size_t i = 0; i < chosen.size(); ++i) {
    if (chosen[i]) in_sample.push_back(good[i]);
  }
  const auto data = standardisation_data(run, sample, chosen);
  const auto magnitudes =
      standardise_selected(data, coefficients(result), run.standardisation.options.host_mass, run.magnitude_limits);
  StandardisationTables out;
  out.magnitudes = magnitudes_table(rows_of(sample, chosen), magnitudes, in_sample, hidden_offset);
  if (!run.magnitude_limits.empty()) add_selection_bias(out.magnitudes, magnitudes);
  out.parameters = parameters_table(result, hidden_offset);
  for (const StandardisationParameter& one : result.parameters) out.names.push_back(one.name);
  out.covariance = result.covariance;
  return out;
}

}  // namespace thirdrung
