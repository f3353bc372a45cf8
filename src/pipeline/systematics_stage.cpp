#include "pipeline/systematics_stage.h"

#include <fmt/format.h>

#include <algorithm>
#include <map>
#include <set>
#include <span>

#include "base/error.h"
#include "base/parallel.h"
#include "base/progress.h"
#include "pipeline/calibrators.h"
#include "pipeline/sample_stage.h"
#include "pipeline/shift_list.h"
#include "pipeline/standardisation_stage.h"
#include "pipeline/table_tools.h"
#include "pipeline/varied_inputs.h"
#include "pipeline/weight_shift.h"

namespace thirdrung {

namespace {

/// What stays while inputs move.
struct Baseline {
  const RunFile& run;
  const RunInputs& inputs;
  Table fits;                      ///< Of the supernovae in `names`.
  std::vector<std::string> names;  ///< In the order of the shifts: the Hubble flow, then calibrators.
  std::vector<bool> used;          ///< One each: in the fit of the coefficients.
  StandardisationCoefficients coefficients;
  Magnitudes magnitudes;        ///< Of the Hubble flow, as the fits give them, without a hidden offset.
  Eigen::VectorXd calibrators;  ///< Magnitudes of the others [mag].

  std::size_t in_flow() const { return magnitudes.supernovae.size(); }
};

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

/// Magnitudes of the Hubble flow made again, from the first of the data.
Magnitudes standardised_again(const RunFile& run, Magnitudes all, const std::vector<StandardisationDatum>& data,
                              const StandardisationCoefficients& coefficients) {
  const std::vector<StandardisationDatum> flow(data.begin(),
                                               data.begin() + static_cast<std::ptrdiff_t>(all.supernovae.size()));
  const auto magnitudes =
      standardise_selected(flow, coefficients, run.standardisation.options.host_mass, run.magnitude_limits);
  for (std::size_t i = 0; i < flow.size(); ++i) {
    const auto k = static_cast<Eigen::Index>(i);
    all.supernovae[i].z_helio = data[i].z_helio;
    all.supernovae[i].z_flow = data[i].z_flow;
    all.supernovae[i].m_b_standardised = magnitudes[i].magnitude;
    all.fit_variance(k) = magnitudes[i].fit_variance;
    all.intrinsic_variance(k) = magnitudes[i].intrinsic_variance;
  }
  return all;
}

/// Magnitudes of the calibrators, the last of the data.
Eigen::VectorXd calibrators_again(const RunFile& run, std::size_t in_flow,
                                  const std::vector<StandardisationDatum>& data,
                                  const StandardisationCoefficients& coefficients) {
  const auto magnitudes =
      standardise(std::span(data).subspan(in_flow), coefficients, run.standardisation.options.host_mass);
  Eigen::VectorXd out(static_cast<Eigen::Index>(magnitudes.size()));
  for (Eigen::Index i = 0; i < out.size(); ++i) out(i) = magnitudes[static_cast<std::size_t>(i)].magnitude;
  return out;
}

StandardisationCoefficients fitted(const RunFile& run, const std::vector<StandardisationDatum>& data,
                                   const std::vector<bool>& used) {
  return coefficients(fit_standardisation(run, where(data, used)));
}

Baseline make_baseline(const RunFile& run, const RunInputs& inputs, const Table& fits, const Table& sample,
                       const Table& magnitudes, const std::vector<std::string>& names) {
  Baseline base{run, inputs, {}, names, {}, {}, {}, {}};
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
  base.magnitudes = standardised_again(run, read_magnitudes(magnitudes), data, base.coefficients);
  base.calibrators = calibrators_again(run, base.in_flow(), data, base.coefficients);
  return base;
}

/// @param others the other systematics, for a move that changes the weights.
Eigen::VectorXd shift_of(const Baseline& base, const MovedInput& moved, const std::vector<SystematicShift>& others) {
  RunFile run = base.run;
  RunInputs inputs = base.inputs;
  moved.move(run, inputs);
  const Table fits = fits_with(moved, run, inputs, base.fits);
  const auto data = data_in_order(run, make_sample(run, fits, inputs.supernovae, inputs.redshifts).sample, base.names);
  const auto coefficients = base.run.refit_with_systematics ? fitted(run, data, base.used) : base.coefficients;
  const Magnitudes magnitudes = standardised_again(run, base.magnitudes, data, coefficients);
  // Redshift and expansion count in the Hubble flow; the distance of a calibrator has no part in them.
  Eigen::VectorXd flow = effective_shift(base.magnitudes.supernovae, base.run.intercept.options.flow,
                                         magnitudes.supernovae, run.intercept.options.flow);
  if (moved.moves_weights) {
    const std::vector<bool> used(base.used.begin(), base.used.begin() + static_cast<std::ptrdiff_t>(base.in_flow()));
    flow.array() += common_shift_of_weights({base.run, base.magnitudes}, {run, magnitudes}, flow, used, others);
  }
  Eigen::VectorXd shift(static_cast<Eigen::Index>(base.names.size()));
  shift << flow, calibrators_again(run, base.in_flow(), data, coefficients) - base.calibrators;
  if (moved.scaled_after) shift *= moved.size;
  return shift;
}

SystematicShift named_shift(const MovedInput& moved, Eigen::VectorXd shift) {
  SystematicShift out;
  out.name = moved.name;
  out.kind = moved.kind;
  out.size = moved.size;
  out.unit = moved.unit;
  // Through alpha, beta and gamma alone, whose errors do not weigh either (CovarianceModel::weighting).
  out.weighs = !moved.moves_weights;
  out.shift = std::move(shift);
  return out;
}

/// Every move of the run, those that change the weights last: they need to know the other shifts.
std::vector<MovedInput> all_moves(const RunFile& run, const RunInputs& inputs) {
  std::vector<MovedInput> all;
  for (const SystematicInput& input : run.systematics) {
    for (MovedInput& one : moved_inputs(input, inputs)) all.push_back(std::move(one));
  }
  std::stable_partition(all.begin(), all.end(), [](const MovedInput& one) { return !one.moves_weights; });
  return all;
}

}  // namespace

SystematicShifts find_systematic_shifts(const RunFile& run, const Table& fits, const Table& sample,
                                        const Table& magnitudes, const SavedShifts& saved) {
  std::vector<std::string> names = magnitudes.strings("supernova");
  for (std::string& name : good_calibrators(run, sample)) names.push_back(std::move(name));
  const RunInputs inputs = read_run_inputs(run, names);
  const Baseline base = make_baseline(run, inputs, fits, sample, magnitudes, names);
  const std::vector<MovedInput> all = all_moves(run, inputs);
  const auto n = static_cast<Eigen::Index>(base.names.size());
  std::vector<SystematicShift> shifts, of_weights;
  Progress progress("Systematics", all.size());
  for (const MovedInput& one : all) {
    if (stop_requested()) throw Interrupted("stopped on request");
    // What moves the weights depends on the other systematics, and is quickly done.
    auto shift = one.moves_weights ? std::nullopt : saved.find(one.identity, n);
    if (!shift) {
      shift = shift_of(base, one, shifts);
      if (!one.moves_weights) saved.save(one.identity, *shift);
    }
    (one.moves_weights ? of_weights : shifts).push_back(named_shift(one, std::move(*shift)));
    progress.advance();
  }
  condense(shifts, "template mode");
  shifts.insert(shifts.end(), std::make_move_iterator(of_weights.begin()), std::make_move_iterator(of_weights.end()));
  make_names_unique(shifts);
  return {base.names, std::move(shifts)};
}

}  // namespace thirdrung
