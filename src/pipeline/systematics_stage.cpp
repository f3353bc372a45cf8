#include "pipeline/systematics_stage.h"

#include <fmt/format.h>

#include <Eigen/SVD>
#include <algorithm>
#include <array>
#include <cmath>
#include <map>
#include <set>

#include "base/error.h"
#include "base/parallel.h"
#include "base/progress.h"
#include "lightcurve/results.h"
#include "pipeline/calibrators.h"
#include "pipeline/sample_stage.h"
#include "pipeline/standardisation_stage.h"
#include "pipeline/table_tools.h"
#include "pipeline/varied_inputs.h"

namespace thirdrung {

namespace {

using Key = std::pair<std::string, std::string>;

std::vector<Key> keys_of(const Table& fits) {
  const auto survey = fits.strings("survey"), supernova = fits.strings("supernova");
  std::vector<Key> out;
  for (std::size_t i = 0; i < survey.size(); ++i) out.emplace_back(survey[i], supernova[i]);
  return out;
}

/// What stays while inputs move.
struct Baseline {
  const RunFile& run;
  const RunInputs& inputs;
  Table fits;                      ///< Of the supernovae in `names`.
  std::vector<std::string> names;  ///< In the order of the shifts: the Hubble flow, then calibrators.
  Eigen::Index in_flow = 0;        ///< So many of them are of the Hubble flow.
  std::vector<bool> used;          ///< One each: in the fit of the coefficients.
  StandardisationCoefficients coefficients;
  std::vector<FlowSupernova> flow;
};

/// Light curves that a moved input touches.
std::vector<LightCurve> touched(const MovedInput& moved, const std::vector<LightCurve>& all) {
  std::vector<LightCurve> out;
  for (const LightCurve& one : all) {
    const bool survey = moved.surveys.empty() ||
                        std::find(moved.surveys.begin(), moved.surveys.end(), one.survey) != moved.surveys.end();
    const bool band = moved.passbands.empty() || std::any_of(one.passbands.begin(), one.passbands.end(), [&](auto& id) {
                        return std::find(moved.passbands.begin(), moved.passbands.end(), id) != moved.passbands.end();
                      });
    if (survey && band) out.push_back(one);
  }
  return out;
}

/// A fit that moves farther than this in t_0 has jumped to another solution, which is not what a small change of an
/// input does [d].
constexpr double jump = 1.0;

/// The baseline's fits with those in `anew` in place of the old ones, but for those that jumped.
Table replaced(const Table& fits, const Table& anew) {
  std::map<Key, double> old_t_0;
  const auto old_keys = keys_of(fits), new_keys = keys_of(anew);
  const auto old_dates = fits.reals("t_0"), new_dates = anew.reals("t_0");
  for (std::size_t i = 0; i < old_keys.size(); ++i) old_t_0[old_keys[i]] = old_dates[i];
  std::vector<bool> take, keep;
  std::set<Key> gone;
  for (std::size_t i = 0; i < new_keys.size(); ++i) {
    const auto old = old_t_0.find(new_keys[i]);
    take.push_back(old != old_t_0.end() && std::abs(new_dates[i] - old->second) < jump);
    if (take.back()) gone.insert(new_keys[i]);
  }
  for (const Key& key : old_keys) keep.push_back(!gone.contains(key));
  const std::array<Table, 2> both = {rows_of(fits, keep), rows_of(anew, take)};
  return stacked(both);
}

Table fits_with(const Baseline& base, const MovedInput& moved, const RunFile& run, const RunInputs& inputs) {
  if (!moved.refits_light_curves) return base.fits;
  const auto light_curves = touched(moved, inputs.light_curves);
  if (light_curves.empty()) return base.fits;
  Progress silent("", 0);
  FitOptions options = run.lightcurve;
  options.curves = false;
  const LightCurveFits fits =
      fit_all(light_curves, inputs.supernovae, PreparedTemplate(inputs.trained.model), inputs.catalogue,
              Extinction(run.milky_way.law, run.milky_way.r_v), options, run.threads, &silent);
  const Table anew = fits_table(fits.fits);
  return anew.rows() > 0 ? replaced(base.fits, anew) : base.fits;
}

/// Rows of the sample in the order of `names`.
std::vector<StandardisationDatum> data_in_order(const RunFile& run, const Table& sample,
                                                const std::vector<std::string>& names) {
  const auto all = standardisation_data(run, sample, std::vector<bool>(sample.rows(), true));
  std::map<std::string, const StandardisationDatum*> by_name;
  for (const StandardisationDatum& one : all) by_name[one.name] = &one;
  std::vector<StandardisationDatum> out;
  for (const std::string& name : names) {
    const auto found = by_name.find(name);
    if (found == by_name.end())
      throw NoResultError(fmt::format("{} can no longer be fitted with an input moved by 1 sigma.", name));
    out.push_back(*found->second);
  }
  return out;
}

std::vector<StandardisationDatum> where(const std::vector<StandardisationDatum>& data, const std::vector<bool>& keep) {
  std::vector<StandardisationDatum> out;
  for (std::size_t i = 0; i < data.size(); ++i) {
    if (keep[i]) out.push_back(data[i]);
  }
  return out;
}

std::vector<FlowSupernova> flow_of(const std::vector<StandardisationDatum>& data,
                                   const StandardisationCoefficients& coefficients, const HostMassOptions& mass) {
  const auto magnitudes = standardise(data, coefficients, mass);
  std::vector<FlowSupernova> out(data.size());
  for (std::size_t i = 0; i < data.size(); ++i) {
    out[i].name = data[i].name;
    out[i].z_helio = data[i].z_helio;
    out[i].z_flow = data[i].z_flow;
    out[i].m_b_standardised = magnitudes[i].magnitude;
  }
  return out;
}

StandardisationCoefficients fitted(const RunFile& run, const std::vector<StandardisationDatum>& data,
                                   const std::vector<bool>& used) {
  return coefficients(fit_standardisation(run, where(data, used)));
}

Baseline make_baseline(const RunFile& run, const RunInputs& inputs, const Table& fits, const Table& sample,
                       const std::vector<std::string>& names, Eigen::Index in_flow) {
  Baseline base{run, inputs, {}, names, in_flow, {}, {}, {}};
  const std::set<std::string> wanted(base.names.begin(), base.names.end());
  std::vector<bool> keep;
  for (const std::string& name : fits.strings("supernova")) keep.push_back(wanted.contains(name));
  base.fits = rows_of(fits, keep);
  std::map<std::string, bool> used;
  const auto listed = sample.strings("supernova");
  const auto flags = sample.flags("used");
  for (std::size_t i = 0; i < listed.size(); ++i) used[listed[i]] = flags[i];
  for (const std::string& name : base.names) base.used.push_back(used[name]);
  const auto data =
      data_in_order(run, make_sample(run, base.fits, inputs.supernovae, inputs.redshifts).sample, base.names);
  base.coefficients = fitted(run, data, base.used);
  base.flow = flow_of(data, base.coefficients, run.standardisation.options.host_mass);
  return base;
}

/// Of the Hubble flow, in which redshift and expansion count; and of calibrators, whose distance has no part in them.
Eigen::VectorXd magnitude_shift(const Baseline& base, const std::vector<FlowSupernova>& moved,
                                const FlowOptions& moved_flow) {
  const auto count = static_cast<std::size_t>(base.in_flow);
  Eigen::VectorXd out(static_cast<Eigen::Index>(moved.size()));
  out.head(base.in_flow) = effective_shift(std::span(base.flow).first(count), base.run.intercept.options.flow,
                                           std::span(moved).first(count), moved_flow);
  for (Eigen::Index i = base.in_flow; i < out.size(); ++i) {
    const auto k = static_cast<std::size_t>(i);
    out[i] = moved[k].m_b_standardised - base.flow[k].m_b_standardised;
  }
  return out;
}

SystematicShift shift_of(const Baseline& base, const MovedInput& moved) {
  RunFile run = base.run;
  RunInputs inputs = base.inputs;
  moved.move(run, inputs);
  const Table fits = fits_with(base, moved, run, inputs);
  const auto data = data_in_order(run, make_sample(run, fits, inputs.supernovae, inputs.redshifts).sample, base.names);
  const auto coefficients = base.run.refit_with_systematics ? fitted(run, data, base.used) : base.coefficients;
  const auto flow = flow_of(data, coefficients, run.standardisation.options.host_mass);
  SystematicShift out;
  out.name = moved.name;
  out.kind = moved.kind;
  out.size = moved.size;
  out.unit = moved.unit;
  out.shift = magnitude_shift(base, flow, run.intercept.options.flow);
  if (moved.scaled_after) out.shift *= moved.size;
  return out;
}

/// Shifts named `stem` and a number, of which there may be hundreds, in their principal directions: the sum of their
/// outer products stays the same but for a part in 1e4 of its trace.
void condense(std::vector<SystematicShift>& shifts, const std::string& stem) {
  std::vector<SystematicShift> others, members;
  for (SystematicShift& one : shifts) (one.name.starts_with(stem) ? members : others).push_back(std::move(one));
  shifts = std::move(others);
  if (members.empty()) return;
  Eigen::MatrixXd matrix(members.front().shift.size(), static_cast<Eigen::Index>(members.size()));
  for (std::size_t k = 0; k < members.size(); ++k) matrix.col(static_cast<Eigen::Index>(k)) = members[k].shift;
  const Eigen::BDCSVD<Eigen::MatrixXd> principal(matrix, Eigen::ComputeThinU);
  const Eigen::VectorXd size = principal.singularValues();
  double left = size.squaredNorm();
  const double enough = 1e-4 * left;
  for (Eigen::Index k = 0; k < size.size() && left > enough; ++k) {
    SystematicShift one = members.front();
    one.name = fmt::format("template direction {}", k + 1);
    one.shift = size(k) * principal.matrixU().col(k);
    if (one.shift.sum() < 0) one.shift = -one.shift;
    shifts.push_back(std::move(one));
    left -= size(k) * size(k);
  }
}

void make_names_unique(std::vector<SystematicShift>& shifts) {
  std::set<std::string> names;
  for (SystematicShift& one : shifts) {
    const std::string name = one.name;
    for (int copy = 2; !names.insert(one.name).second; ++copy) one.name = fmt::format("{} ({})", name, copy);
  }
}

}  // namespace

SystematicShifts find_systematic_shifts(const RunFile& run, const Table& fits, const Table& sample,
                                        const Table& magnitudes) {
  std::vector<std::string> names = magnitudes.strings("supernova");
  const auto in_flow = static_cast<Eigen::Index>(names.size());
  for (std::string& name : good_calibrators(run, sample)) names.push_back(std::move(name));
  const RunInputs inputs = read_run_inputs(run, names);
  const Baseline base = make_baseline(run, inputs, fits, sample, names, in_flow);
  std::vector<MovedInput> all;
  for (const SystematicInput& input : run.systematics) {
    for (MovedInput& one : moved_inputs(input, inputs)) all.push_back(std::move(one));
  }
  SystematicShifts out{base.names, {}};
  Progress progress("Systematics", all.size());
  for (const MovedInput& one : all) {
    if (stop_requested()) throw Interrupted("stopped on request");
    out.shifts.push_back(shift_of(base, one));
    progress.advance();
  }
  condense(out.shifts, "template mode");
  make_names_unique(out.shifts);
  return out;
}

}  // namespace thirdrung
