#include "pipeline/intercept_stage.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <set>

#include "hubbleflow/budget.h"
#include "hubbleflow/influence.h"
#include "hubbleflow/robust.h"
#include "hubbleflow/scan_frame.h"
#include "pipeline/quantities.h"
#include "pipeline/table_tools.h"

namespace thirdrung {

namespace {

void add_dipole(Quantities& out, const FlowDipole& dipole) {
  out.add("dipole", dipole.amplitude, dipole.amplitude_error, "km / s", "velocity of the whole sample");
  out.add("dipole_l", dipole.l, dipole.l_error, "deg", "its Galactic longitude");
  out.add("dipole_b", dipole.b, dipole.b_error, "deg", "its Galactic latitude");
  out.add("dipole_probability", dipole.probability, "", "of a dipole at least as large by chance");
}

Table intercept_table(const InterceptOptions& options, const InterceptResult& result, const Budget& budget) {
  Quantities out;
  out.add("a_b", result.a_b, result.error, "", "intercept of the magnitude-redshift relation");
  out.add("a_b_error_stat", budget.error_stat, "", "statistical part of its error");
  out.add("a_b_error_sys", budget.error_sys, "", "systematic part of its error");
  out.add("supernovae", static_cast<double>(result.supernovae), "", "in the fit");
  out.add("z_min", options.z_min, "", "lower limit of z_flow");
  out.add("z_max", options.z_max, "", "upper limit of z_flow");
  out.add("scatter", result.scatter_mag, "mag", "root mean square of the residuals, unweighted");
  out.add("chi2", result.chi2, "", "of the residuals, with the whole covariance");
  out.add("dof", result.dof, "", "degrees of freedom");
  out.add("probability", result.probability, "", "of a chi2 at least as large");
  if (result.q0) {
    out.add("q0", *result.q0, result.q0_error.value_or(missing_value), "", "deceleration, fitted");
    out.add("q0_correlation", result.q0_correlation.value_or(missing_value), "", "with a_b");
  }
  if (result.dipole) add_dipole(out, *result.dipole);
  return out.table();
}

Table standardised_table(const Magnitudes& sample, const Eigen::MatrixXd& covariance, const InterceptOptions& options,
                         const InterceptResult& result, const RobustResult& outliers) {
  std::set<std::string> mistrusted;
  for (const Mistrusted& one : outliers.mistrusted) mistrusted.insert(one.supernova);
  const Eigen::VectorXd single = single_intercepts(sample.supernovae, options.flow);
  std::vector<std::string> name, survey;
  std::vector<double> z_flow, magnitude, magnitude_error, ab, residual, residual_error, weight;
  std::vector<bool> mark;
  Eigen::Index in_fit = 0;
  for (std::size_t i = 0; i < sample.supernovae.size(); ++i) {
    const FlowSupernova& one = sample.supernovae[i];
    const auto k = static_cast<Eigen::Index>(i);
    name.push_back(one.name);
    survey.push_back(joined_list(one.surveys, ","));
    z_flow.push_back(one.z_flow);
    magnitude.push_back(one.m_b_standardised);
    magnitude_error.push_back(std::sqrt(sample.fit_variance(k) + sample.intrinsic_variance(k)));
    ab.push_back(single(k));
    residual.push_back(result.used[i] ? result.residuals(in_fit) : 5.0 * (result.a_b - single(k)));
    residual_error.push_back(std::sqrt(covariance(k, k)));
    weight.push_back(result.used[i] ? result.weights(in_fit) : 0.0);
    if (result.used[i]) ++in_fit;
    mark.push_back(mistrusted.contains(one.name));
  }
  Table out;
  out.add_strings("supernova", std::move(name)).add_strings("survey", std::move(survey));
  out.add_reals("z_flow", std::move(z_flow));
  out.add_reals("m_b_standardised", std::move(magnitude), "mag");
  out.add_reals("m_b_standardised_error", std::move(magnitude_error), "mag", "of the fit and the intrinsic scatter");
  out.add_reals("ab_single", std::move(ab), "", "intercept that this supernova alone gives");
  out.add_reals("residual", std::move(residual), "mag", "from the relation; faint is positive");
  out.add_reals("residual_error", std::move(residual_error), "mag", "from the diagonal of the whole covariance");
  out.add_reals("weight", std::move(weight), "", "in a_b; 0 outside the redshift range");
  out.add_flags("used", result.used, "in the redshift range of the intercept");
  out.add_flags("chauvenet_mistrusted", std::move(mark), "an outlier by Chauvenet's criterion");
  return out;
}

/// A word beside the supernova that lies farthest from what all others predict for it.
std::string caution_of(const InfluenceRow& row, std::size_t count) {
  const double chance = chance_of_largest_pull(row.predicted_pull, count);
  return fmt::format("most extreme of {}: chance alone reaches a pull of {:.1f} somewhere in {:.2g}% of such samples",
                     count, std::abs(row.predicted_pull), 100.0 * chance);
}

Table influence_table(const std::vector<InfluenceRow>& rows) {
  const auto extreme = std::max_element(rows.begin(), rows.end(), [](const InfluenceRow& a, const InfluenceRow& b) {
    return std::abs(a.predicted_pull) < std::abs(b.predicted_pull);
  });
  std::vector<std::string> name, caution;
  std::vector<double> delta, error, weight, pull;
  for (const InfluenceRow& row : rows) {
    name.push_back(row.supernova);
    caution.push_back(&row == &*extreme ? caution_of(row, rows.size()) : "");
    delta.push_back(row.delta_ab);
    error.push_back(row.delta_ab_error);
    weight.push_back(row.weight);
    pull.push_back(row.predicted_pull);
  }
  Table out;
  out.add_strings("supernova", std::move(name));
  out.add_reals("delta_ab", std::move(delta), "", "a_b without it minus a_b with it");
  out.add_reals("delta_ab_error", std::move(error), "", "expected size of that");
  out.add_reals("weight", std::move(weight), "", "in a_b");
  out.add_reals("predicted_pull", std::move(pull), "", "residual from what all others predict, over its error");
  out.add_strings("caution", std::move(caution));
  return out;
}

Table budget_table(const Budget& budget) {
  std::vector<std::string> source, kind, size;
  std::vector<double> ab, mag, h0, with, share;
  for (const BudgetRow& row : budget.rows) {
    source.push_back(row.source);
    kind.push_back(row.kind);
    size.push_back(row.size == 0.0 ? std::string() : fmt::format("{:g} {}", row.size, row.unit));
    ab.push_back(row.ab_contribution);
    mag.push_back(row.mag_contribution);
    h0.push_back(row.h0_percent);
    with.push_back(row.with_correlations);
    share.push_back(row.variance_share);
  }
  Table out;
  out.add_strings("source", std::move(source)).add_strings("kind", std::move(kind));
  out.add_strings("size", std::move(size), "1 sigma of the input");
  out.add_reals("ab_contribution", std::move(ab), "", "to the error of a_b, alone");
  out.add_reals("mag_contribution", std::move(mag), "mag", "five times that");
  out.add_reals("h0_percent", std::move(h0), "", "the same in percent of H0");
  out.add_reals("with_correlations", std::move(with), "", "with half of every correlation counted here, signed");
  out.add_reals("variance_share", std::move(share), "", "of the variance of a_b; the shares add up to it");
  return out;
}

Table derivatives_table(const std::vector<InputDerivative>& rows) {
  std::vector<std::string> input, unit;
  std::vector<double> d_ab;
  for (const InputDerivative& row : rows) {
    input.push_back(row.input);
    unit.push_back(row.unit);
    d_ab.push_back(row.d_ab);
  }
  Table out;
  out.add_strings("input", std::move(input)).add_strings("unit", std::move(unit), "of the input");
  out.add_reals("d_ab", std::move(d_ab), "", "change of a_b per that unit");
  return out;
}

}  // namespace

InterceptTables fit_intercept_of(const RunFile& run, const Magnitudes& magnitudes, const CovarianceModel& model) {
  const InterceptOptions& options = run.intercept.options;
  const Eigen::MatrixXd covariance = model.total();
  const FlowSample flow{magnitudes.supernovae, covariance, model.weighting()};
  const InterceptResult result = fit_intercept(flow, options);
  const Budget budget = make_budget(cut(model, result.used), result.weights);
  const ScanFrame frame(flow, options);
  InterceptTables out;
  out.intercept = intercept_table(options, result, budget);
  out.standardised = standardised_table(magnitudes, covariance, options, result, chauvenet(frame));
  out.influence = influence_table(influence(frame));
  out.budget = budget_table(budget);
  out.derivatives = derivatives_table(input_derivatives(cut(model, result.used), result.weights));
  return out;
}

}  // namespace thirdrung
