#include "pipeline/calibrators.h"

#include <fmt/format.h>

#include <algorithm>
#include <map>

#include "base/error.h"
#include "base/text.h"
#include "pipeline/sample_stage.h"
#include "tables/read_write.h"

namespace thirdrung {

namespace {

[[noreturn]] void unknown_calibrator(const Calibrator& one, const SurveySupernovae& supernovae) {
  std::vector<std::string> names;
  for (const Supernova& known : supernovae.supernovae) names.push_back(known.name);
  const std::string near = nearest_word(one.supernova, names);
  throw InputError(one.place, fmt::format("the calibrator {} is in no supernova table of the run", one.supernova),
                   near.empty() ? "add it and its photometry to a survey, or take the row out"
                                : fmt::format("did you mean {}?", near));
}

/// Places of the rows of the sample.
std::map<std::string, std::size_t> places_by_name(const Table& sample) {
  std::map<std::string, std::size_t> out;
  for (const std::string& name : sample.strings("supernova")) out.emplace(name, out.size());
  return out;
}

std::map<std::string, std::string> reasons_in(const Table& set_aside) {
  std::map<std::string, std::string> out;
  if (set_aside.rows() == 0) return out;
  const auto names = set_aside.strings("supernova"), reasons = set_aside.strings("reason");
  for (std::size_t i = 0; i < names.size(); ++i) out.emplace(names[i], reasons[i]);
  return out;
}

}  // namespace

CalibratorList read_run_calibrators(const RunFile& run) {
  if (!run.join.calibrators.given()) return {};
  require_exists(run.join.calibrators);
  if (run.join.covariance.given()) require_exists(run.join.covariance);
  return read_calibrators(read_table(run.join.calibrators.path), run.join.covariance.path);
}

std::set<std::string> calibrator_names(const RunFile& run) {
  std::set<std::string> out;
  for (const Calibrator& one : read_run_calibrators(run).calibrators) out.insert(one.supernova);
  return out;
}

void check_calibrators(const RunFile& run, const CalibratorList& list, const SurveySupernovae& supernovae,
                       const RedshiftOptions& redshifts) {
  std::map<std::string, const Supernova*> listed;
  for (const Supernova& one : supernovae.supernovae) listed.emplace(one.name, &one);
  std::set<std::string> unusable;
  for (const SetAside& one : supernovae.set_aside) unusable.insert(one.supernova);
  const InterceptOptions& flow = run.intercept.options;
  for (const Calibrator& one : list.calibrators) {
    const auto found = listed.find(one.supernova);
    if (found == listed.end()) {
      if (unusable.contains(one.supernova)) continue;  // Left out with the reason, like any other supernova.
      unknown_calibrator(one, supernovae);
    }
    const double z = redshifts_of(*found->second, redshifts).z_flow;
    if (!(z > flow.z_min && z < flow.z_max)) continue;
    throw InputError(one.place,
                     fmt::format("{} is a calibrator and stands in the Hubble flow too, at z_flow = {:.4f} between "
                                 "z_min = {:g} and z_max = {:g}",
                                 one.supernova, z, flow.z_min, flow.z_max),
                     "take it out of the calibrators, or change the redshift range of [intercept]");
  }
}

void check_calibrators(const RunFile& run) {
  if (!run.join.calibrators.given()) return;
  check_calibrators(run, read_run_calibrators(run), read_all_supernovae(run), read_redshift_options(run));
}

std::vector<bool> calibrator_rows(const Table& sample) {
  return sample.has("calibrator") ? sample.flags("calibrator") : std::vector<bool>(sample.rows(), false);
}

CutResult calibrator_cuts(const RunFile& run, const Table& sample) {
  CutLimits limits = run.cuts;
  limits.z_min.reset();
  limits.z_max.reset();
  return apply_cuts(cut_subjects(sample), cut_rules(limits));
}

std::vector<std::string> good_calibrators(const RunFile& run, const Table& sample) {
  const auto rows = calibrator_rows(sample);
  const CutResult cuts = calibrator_cuts(run, sample);
  const auto names = sample.strings("supernova");
  std::vector<std::string> out;
  for (std::size_t i = 0; i < rows.size(); ++i) {
    if (rows[i] && cuts.used[i]) out.push_back(names[i]);
  }
  return out;
}

CalibratorChoice choose_calibrators(const RunFile& run, const CalibratorList& list, const Table& sample,
                                    const Table& set_aside) {
  const CutResult cuts = calibrator_cuts(run, sample);
  const auto places = places_by_name(sample);
  const auto reasons = reasons_in(set_aside);
  CalibratorChoice out;
  for (const Calibrator& one : list.calibrators) {
    const auto found = places.find(one.supernova);
    const auto reason = reasons.find(one.supernova);
    out.used.push_back(found != places.end() && cuts.used[found->second]);
    out.why_not.push_back(found != places.end()     ? cuts.all_rules(found->second)
                          : reason != reasons.end() ? "set aside: " + reason->second
                                                    : std::string("its light curve has no fit"));
  }
  return out;
}

Magnitudes calibrator_magnitudes(const RunFile& run, const Table& sample, const std::vector<std::string>& names,
                                 const StandardisationCoefficients& coefficients, double hidden_magnitude) {
  const auto all = standardisation_data(run, sample, std::vector<bool>(sample.rows(), true));
  const auto places = places_by_name(sample);
  std::vector<StandardisationDatum> data;
  data.reserve(names.size());
  for (const std::string& name : names) data.push_back(all[places.at(name)]);
  const auto standardised = standardise(data, coefficients, run.standardisation.options.host_mass);
  Magnitudes out;
  out.fit_variance.resize(static_cast<Eigen::Index>(data.size()));
  out.intrinsic_variance.resize(static_cast<Eigen::Index>(data.size()));
  for (std::size_t i = 0; i < data.size(); ++i) {
    FlowSupernova one;
    one.name = data[i].name;
    one.surveys = data[i].surveys;
    one.z_helio = data[i].z_helio;
    one.z_flow = data[i].z_flow;
    one.m_b_standardised = standardised[i].magnitude + hidden_magnitude;
    one.s = data[i].s;
    one.c = data[i].c;
    one.host_log_mass = data[i].host_log_mass;
    out.supernovae.push_back(std::move(one));
    out.fit_variance(static_cast<Eigen::Index>(i)) = standardised[i].fit_variance;
    out.intrinsic_variance(static_cast<Eigen::Index>(i)) = standardised[i].intrinsic_variance;
    out.z_helio_error.push_back(missing_value);
    out.mass_probability.push_back(standardised[i].mass_probability);
    out.in_sample.push_back(false);
  }
  return out;
}

}  // namespace thirdrung
