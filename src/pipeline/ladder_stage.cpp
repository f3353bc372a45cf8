#include "pipeline/ladder_stage.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "base/error.h"
#include "pipeline/calibrators.h"
#include "pipeline/quantities.h"

namespace thirdrung {

namespace {

Magnitudes both(const Magnitudes& calibrators, const Magnitudes& flow) {
  Magnitudes out = calibrators;
  const auto append = [](auto& to, const auto& from) { to.insert(to.end(), from.begin(), from.end()); };
  append(out.supernovae, flow.supernovae);
  append(out.z_helio_error, flow.z_helio_error);
  append(out.mass_probability, flow.mass_probability);
  append(out.in_sample, flow.in_sample);
  const Eigen::Index n = calibrators.fit_variance.size(), m = flow.fit_variance.size();
  out.fit_variance.conservativeResize(n + m);
  out.fit_variance.tail(m) = flow.fit_variance;
  out.intrinsic_variance.conservativeResize(n + m);
  out.intrinsic_variance.tail(m) = flow.intrinsic_variance;
  return out;
}

/// A part of the Hubble flow's covariance with `calibrators` (or nothing) in their rows before it.
CovariancePart with_calibrators(const CovariancePart& part, const Eigen::VectorXd& calibrators) {
  CovariancePart out = part;
  const Eigen::Index n = calibrators.size();
  if (part.diagonal.size() > 0) {
    out.diagonal.resize(n + part.diagonal.size());
    out.diagonal << calibrators, part.diagonal;
  }
  if (part.matrix.size() > 0) {
    const Eigen::Index m = part.matrix.rows();
    out.matrix = Eigen::MatrixXd::Zero(n + m, n + m);
    out.matrix.bottomRightCorner(m, m) = part.matrix;
  }
  return out;
}

/// Velocities are the Hubble flow's alone: distances of calibrators do not come from their redshifts.
CovarianceModel uncertainty_of(const RunFile& run, const LadderInput& input, const Magnitudes& calibrators,
                               const Magnitudes& flow) {
  const CovarianceModel of_flow = make_covariance(run, flow, {}, {});
  const Magnitudes all = both(calibrators, flow);
  CovarianceModel out;
  for (const FlowSupernova& one : all.supernovae) out.supernovae.push_back(one.name);
  for (const CovariancePart& part : of_flow.parts) {
    const bool fit = part.name == light_curve_part, intrinsic = part.name == intrinsic_part;
    out.parts.push_back(with_calibrators(part, fit         ? calibrators.fit_variance
                                               : intrinsic ? calibrators.intrinsic_variance
                                                           : Eigen::VectorXd::Zero(calibrators.fit_variance.size())));
  }
  if (!input.coefficient_covariance.names.empty())
    out.parts.push_back(coefficients_part(all, input.coefficient_covariance));
  if (!input.shifts.shifts.empty()) out.systematics = shifts_for(input.shifts, out.supernovae);
  return out;
}

/// Weighted scatter would hide a single bad calibrator; this does not.
double root_mean_square(const std::vector<double>& values) {
  double squares = 0.0;
  std::size_t count = 0;
  for (const double value : values) {
    if (!std::isfinite(value)) continue;
    squares += value * value;
    ++count;
  }
  return count == 0 ? missing_value : std::sqrt(squares / static_cast<double>(count));
}

Table join_table(const LadderResult& result, double scatter) {
  const LadderSolution& s = result.solution;
  const auto counted = [&](LadderRowKind kind) { return static_cast<double>(result.block.count(kind)); };
  Quantities out;
  out.add("h0", s.h0, s.h0_error, "km / s / Mpc", "Hubble constant");
  out.add("log10_h0", 0.2 * s.five_log10_h0, 0.2 * s.five_log10_h0_error, "", "its logarithm");
  out.add("five_log10_h0", s.five_log10_h0, s.five_log10_h0_error, "mag", "five times that");
  out.add("m_b", s.m_b, s.m_b_error, "mag", "absolute magnitude of a supernova of s = 1, c = 0");
  out.add("correlation", s.correlation, "", "of m_b and five_log10_h0");
  out.add("calibrators", counted(LadderRowKind::calibrator), "", "supernovae used");
  out.add("hosts", counted(LadderRowKind::host), "", "hosts that they are in");
  out.add("supernovae", counted(LadderRowKind::hubble_flow), "", "in the Hubble flow");
  out.add("calibrator_scatter", scatter, "mag", "root mean square of the calibrators about m_b, unweighted");
  out.add("chi2", s.chi2, "", "of all residuals, calibrators, hosts and Hubble flow");
  out.add("dof", s.dof, "", "degrees of freedom");
  out.add("probability", s.probability, "", "of a chi2 at least as large");
  const std::string of = "of the variance of log10_h0: ";
  out.add("share_of_calibrators", s.shares.calibrators, "", of + "distances of the hosts, and the supernovae in them");
  out.add("share_of_hubble_flow", s.shares.hubble_flow, "", of + "supernovae in the Hubble flow");
  out.add("share_of_coefficients", s.shares.coefficients, "", of + "alpha, beta and gamma, common to both");
  out.add("share_of_systematics", s.shares.systematics, "", of + "systematics, on both; the four shares add up to 1");
  out.add("share_of_host_distances", s.shares.distances, "", "the part of share_of_calibrators from the distances");
  return out.table();
}

struct CalibratorColumns {
  std::vector<double> magnitude, magnitude_error, modulus, modulus_error, absolute, absolute_error, residual, weight;
};

CalibratorColumns calibrator_columns(const CalibratorList& list, const CalibratorChoice& choice, const Magnitudes& used,
                                     const LadderResult& result) {
  CalibratorColumns out;
  Eigen::Index next = 0;
  for (std::size_t i = 0; i < list.calibrators.size(); ++i) {
    const Eigen::Index host = list.host_of(i);
    const double modulus_variance = list.distances.covariance(host, host);
    out.modulus.push_back(list.distances.modulus(host));
    out.modulus_error.push_back(std::sqrt(modulus_variance));
    double magnitude = missing_value, variance = missing_value, weight = 0.0;
    if (choice.used[i]) {
      magnitude = used.supernovae[static_cast<std::size_t>(next)].m_b_standardised;
      variance = used.fit_variance(next) + used.intrinsic_variance(next);
      weight = result.solution.weights(result.block.absolute_magnitude, next);
      ++next;
    }
    out.magnitude.push_back(magnitude);
    out.magnitude_error.push_back(std::sqrt(variance));
    out.absolute.push_back(magnitude - out.modulus.back());
    out.absolute_error.push_back(std::sqrt(variance + modulus_variance));
    out.residual.push_back(out.absolute.back() - result.solution.m_b);
    out.weight.push_back(weight);
  }
  return out;
}

Table calibrators_table(const CalibratorList& list, const CalibratorChoice& choice, CalibratorColumns columns) {
  std::vector<std::string> name, host;
  for (const Calibrator& one : list.calibrators) {
    name.push_back(one.supernova);
    host.push_back(one.host);
  }
  Table out;
  out.add_strings("supernova", std::move(name)).add_strings("host", std::move(host));
  out.add_reals("m_b_standardised", std::move(columns.magnitude), "mag",
                "m_b + alpha (s - 1) - beta c + gamma (P - 1/2)");
  out.add_reals("m_b_standardised_error", std::move(columns.magnitude_error), "mag",
                "of the fit and the intrinsic scatter");
  out.add_reals("distance_modulus", std::move(columns.modulus), "mag", "of the host, as given");
  out.add_reals("distance_modulus_error", std::move(columns.modulus_error), "mag", "1 sigma");
  out.add_reals("absolute_magnitude", std::move(columns.absolute), "mag", "of this calibrator alone");
  out.add_reals("absolute_magnitude_error", std::move(columns.absolute_error), "mag",
                "of magnitude and distance, without what calibrators share");
  out.add_reals("residual", std::move(columns.residual), "mag", "from M_B; faint is positive");
  out.add_reals("weight", std::move(columns.weight), "",
                "of its magnitude in M_B; the Hubble flow may have a part too");
  out.add_flags("used", choice.used, "passes the quality rules");
  out.add_strings("why_not", choice.why_not, "every rule that removes it");
  return out;
}

}  // namespace

LadderResult join_calibrators(const RunFile& run, const LadderInput& input) {
  const CalibratorList list = read_run_calibrators(run);
  const CalibratorChoice choice = choose_calibrators(run, list, input.sample, input.set_aside);
  if (std::count(choice.used.begin(), choice.used.end(), true) == 0) {
    throw NoResultError(fmt::format("Not one of {} calibrators passes the quality rules; the first, {}: {}.",
                                    list.calibrators.size(), list.calibrators.front().supernova,
                                    choice.why_not.front()));
  }
  LadderSupernovae ladder;
  ladder.calibrators = some_of(list, choice.used);
  std::vector<std::string> names;
  for (const Calibrator& one : ladder.calibrators.calibrators) names.push_back(one.supernova);
  const Magnitudes calibrators =
      calibrator_magnitudes(run, input.sample, names, input.coefficients, input.hidden_magnitude);
  const InterceptOptions& intercept = run.intercept.options;
  std::vector<bool> in_flow = in_redshift_range(input.magnitudes.supernovae, intercept.z_min, intercept.z_max);
  for (std::size_t i = 0; i < in_flow.size(); ++i) in_flow[i] = in_flow[i] && input.magnitudes.in_sample[i];
  const Magnitudes flow = some_of(input.magnitudes, in_flow);
  ladder.flow = flow.supernovae;
  ladder.m_b_standardised.resize(static_cast<Eigen::Index>(names.size()));
  for (std::size_t i = 0; i < names.size(); ++i)
    ladder.m_b_standardised(static_cast<Eigen::Index>(i)) = calibrators.supernovae[i].m_b_standardised;
  ladder.uncertainty = uncertainty_of(run, input, calibrators, flow);

  LadderResult out;
  out.block = make_ladder_block(ladder, intercept);
  out.solution = solve_ladder(out.block);
  const CalibratorColumns columns = calibrator_columns(list, choice, calibrators, out);
  out.join = join_table(out, root_mean_square(columns.residual));
  out.calibrators = calibrators_table(list, choice, columns);
  return out;
}

}  // namespace thirdrung
