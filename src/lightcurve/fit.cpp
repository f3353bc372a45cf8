#include "lightcurve/fit.h"

#include <fmt/format.h>

#include <Eigen/Eigenvalues>
#include <algorithm>
#include <cmath>

#include "base/chi_square.h"
#include "base/constants.h"
#include "lightcurve/solve.h"

namespace thirdrung {

namespace {

void check(const Supernova& supernova) {
  const auto fail = [&](const std::string& column, const std::string& fault, const std::string& remedy) {
    Place place = supernova.place;
    place.column = column;
    throw InputError(place, fmt::format("{}: {}", supernova.name, fault), remedy);
  };
  const double z = supernova.z_helio;
  if (!std::isfinite(z)) fail("z_helio", "no redshift", "give the heliocentric redshift");
  if (z <= 0 || z > 3) {
    fail("z_helio", fmt::format("redshift {} is not between 0 and 3", z), "give the heliocentric redshift");
  }
  if (!std::isfinite(supernova.mw_ebv) || supernova.mw_ebv < 0) {
    fail("mw_ebv", "no Milky Way reddening", "give E(B-V), or name a dust map in the run file");
  }
}

/// Solves from one start, and once more if the answer would choose other epochs.
Solution solve_with_selection(const Problem& problem, const Parameters& start, bool& reselected) {
  Selection selection = select(problem.observed, problem.model, start, problem.options);
  if (selection.empty()) return {};
  Solution first = solve(problem, start, std::move(selection));
  Selection again = select(problem.observed, problem.model, first.at, problem.options);
  if (again == first.selection || again.empty()) return first;
  Solution second = solve(problem, first.at, std::move(again));
  reselected = select(problem.observed, problem.model, second.at, problem.options) != second.selection;
  return second;
}

struct Candidate {
  Solution solution;
  bool reselected = false;
  double likelihood = 0;  ///< −2 ln L on the epochs of all candidates.
};

/// The solutions of all starts that lead somewhere, best first, each t_0 once.
std::vector<Candidate> candidates(const Problem& problem, const std::vector<Start>& starts) {
  std::vector<Candidate> out;
  Selection all;
  for (const Start& start : starts) {
    Candidate one;
    one.solution = solve_with_selection(problem, start.at, one.reselected);
    if (one.solution.selection.empty() || !std::isfinite(one.solution.chi2)) continue;
    Selection joined;
    std::set_union(all.begin(), all.end(), one.solution.selection.begin(), one.solution.selection.end(),
                   std::back_inserter(joined));
    all = std::move(joined);
    out.push_back(std::move(one));
  }
  if (out.size() < 2) return out;
  for (Candidate& one : out) one.likelihood = minus_two_log_likelihood(problem, one.solution, all);
  std::stable_sort(out.begin(), out.end(),
                   [](const Candidate& a, const Candidate& b) { return a.likelihood < b.likelihood; });
  return out;
}

/// Whether another solution is a different one: further off in t_0 than both errors, and than 2 rest-frame days.
bool is_apart(const Solution& a, const Solution& b, double z) {
  const double distance = std::abs(a.at[0] - b.at[0]);
  return distance > 2 * (1 + z) && distance > 2 * std::sqrt(a.covariance(0, 0) + b.covariance(0, 0));
}

void describe_epochs(const Problem& problem, const LightCurve& light_curve, const Solution& solution,
                     LightCurveFit& fit) {
  for (std::size_t k = 0; k < solution.selection.size(); ++k) {
    const Observation& observation = problem.observed.observations[solution.selection[k]];
    const ObservedBand& band = problem.observed.bands[observation.band];
    FittedEpoch out;
    out.epoch = observation.epoch;
    out.phase = phase_of(problem.observed, observation, solution.at);
    out.model_flux = solution.flux[static_cast<Eigen::Index>(k)];
    if (problem.options.template_scatter) {
      out.model_error = out.model_flux *
                        std::hypot(problem.model.epoch_scatter(out.phase, band.mean_wavelength), band.colour_scatter);
    }
    const double variance = observation.variance + out.model_error * out.model_error;
    out.pull = (observation.flux - out.model_flux) / std::sqrt(variance);
    // Residuals of a least-squares fit have the covariance C − J (J^T C^−1 J)^−1 J^T.
    const Eigen::Vector4d by_parameters = solution.slopes.row(static_cast<Eigen::Index>(k));
    out.freedom = std::max(0.0, 1 - by_parameters.dot(solution.covariance * by_parameters) / variance);
    if (!solution.weights.empty()) out.weight = solution.weights[k];
    out.mistrusted = out.weight < problem.options.mistrust_below;
    fit.epochs.push_back(out);
    // What the robust loss has dismissed is no reason to trust a fit.
    if (out.mistrusted) continue;
    fit.first_phase = fit.bands_used.empty() ? out.phase : std::min(fit.first_phase, out.phase);
    fit.last_phase = fit.bands_used.empty() ? out.phase : std::max(fit.last_phase, out.phase);
    const std::string& id = light_curve.passbands[band.passband];
    if (fit.bands_used.empty() || fit.bands_used.back() != id) fit.bands_used.push_back(id);
  }
  std::sort(fit.epochs.begin(), fit.epochs.end(),
            [](const FittedEpoch& a, const FittedEpoch& b) { return a.epoch < b.epoch; });
}

void draw_curves(const Problem& problem, const Solution& solution, LightCurveFit& fit) {
  const double first = std::ceil(std::max(problem.options.phase_min, problem.model.phase_min * fit.s));
  const double last = std::floor(std::min(problem.options.phase_max, problem.model.phase_max * fit.s));
  const double amplitude = std::exp(-constants::ln_flux_per_mag * fit.m_b);
  std::size_t seen = problem.observed.bands.size();
  for (const std::size_t i : solution.selection) {
    const std::size_t b = problem.observed.observations[i].band;
    if (b == seen) continue;
    seen = b;
    const ObservedBand& band = problem.observed.bands[b];
    for (double phase = first; phase <= last; phase += 1) {
      CurvePoint point;
      point.passband = band.passband;
      point.phase = phase;
      point.mjd = fit.t_0 + phase * (1 + fit.z_helio);
      point.model_flux = amplitude * band.table.at(phase / fit.s, fit.s, fit.c).flux;
      point.model_error = problem.options.template_scatter
                              ? point.model_flux * std::hypot(problem.model.epoch_scatter(phase, band.mean_wavelength),
                                                              band.colour_scatter)
                              : 0.0;
      fit.curves.push_back(point);
    }
  }
}

void remark_on(const Problem& problem, const Solution& solution, bool reselected, LightCurveFit& fit) {
  const FitOptions& options = problem.options;
  const auto add_if = [&](bool holds, Remark remark) {
    if (holds) fit.remarks.push_back(remark);
  };
  const auto at_bound = [](double x, double low, double high) {
    return std::min(x - low, high - x) < 1e-3 * (high - low);
  };
  add_if(!solution.converged, Remark::not_converged);
  add_if(fit.epochs_used < 5, Remark::too_few_epochs);
  add_if(fit.bands_used.size() < 2, Remark::one_band);
  add_if(at_bound(fit.s, options.s_min, options.s_max), Remark::s_at_bound);
  add_if(at_bound(fit.c, options.c_min, options.c_max), Remark::c_at_bound);
  add_if(at_bound(solution.at[0], problem.window.first, problem.window.last), Remark::t_0_at_bound);
  add_if(fit.competing.has_value(), Remark::competing_solution);
  const Eigen::Vector4d error = fit.covariance.diagonal().cwiseSqrt();
  add_if(!(error[0] < options.largest_t_0_error * (1 + fit.z_helio) && error[2] < options.largest_s_error &&
           error[3] < options.largest_c_error),
         Remark::weakly_determined);
  const bool dated = error[0] < options.late_t_0_error * (1 + fit.z_helio);
  add_if(fit.first_phase > (dated ? options.latest_start : options.late_start), Remark::starts_late);
  add_if(fit.fit_probability < options.improbable && fit.chi2 > options.impossible_chi2_per_dof * fit.dof,
         Remark::improbable);
  add_if(fit.first_phase > 0 || fit.last_phase < 0, Remark::t_0_outside_data);
  add_if(fit.mistrusted_epochs() > options.most_mistrusted * static_cast<double>(fit.epochs.size()),
         Remark::many_mistrusted);
  add_if(fit.mistrusted_epochs() > 0, Remark::epochs_mistrusted);
  add_if(!fit.bands_left_out.empty(), Remark::bands_left_out);
  add_if(reselected, Remark::epochs_reselected);
}

void fill(const Problem& problem, const LightCurve& light_curve, const PreparedTemplate& prepared,
          const std::vector<Candidate>& solutions, LightCurveFit& fit) {
  const Solution& best = solutions.front().solution;
  fit.t_0 = problem.observed.reference_mjd + best.at[0];
  fit.m_b = best.at[1];
  fit.s = best.at[2];
  fit.c = best.at[3];
  fit.covariance = best.covariance;
  fit.chi2 = best.chi2;
  fit.epochs_used = static_cast<int>(best.counted);
  fit.dof = std::max(0, fit.epochs_used - 4);
  fit.fit_probability = chi_square_survival(fit.chi2, fit.dof);
  fit.dm15_b = prepared.dm15_b(fit.s, fit.c);
  fit.iterations = best.iterations;
  describe_epochs(problem, light_curve, best, fit);
  if (problem.options.curves) draw_curves(problem, best, fit);
  for (std::size_t k = 1; k < solutions.size() && !fit.competing; ++k) {
    const Solution& other = solutions[k].solution;
    const double delta = solutions[k].likelihood - solutions.front().likelihood;
    if (delta < problem.options.competing_chi2 && is_apart(best, other, fit.z_helio)) {
      fit.competing =
          CompetingSolution{problem.observed.reference_mjd + other.at[0], other.at[1], other.at[2], other.at[3], delta};
    }
  }
  remark_on(problem, best, solutions.front().reselected, fit);
}

}  // namespace

bool is_definite(const Eigen::Matrix4d& covariance) {
  const Eigen::Vector4d scale = covariance.diagonal().cwiseSqrt().cwiseInverse();
  const Eigen::Matrix4d correlation = scale.asDiagonal() * covariance * scale.asDiagonal();
  if (!correlation.allFinite()) return false;
  // Rounding leaves a singular matrix an eigenvalue of 1e-16 of either sign; two parameters of a fit correlated to
  // 0.99999 leave 1e-5.
  constexpr double smallest = 1e-10;
  using Solver = Eigen::SelfAdjointEigenSolver<Eigen::Matrix4d>;
  return Solver(correlation, Eigen::EigenvaluesOnly).eigenvalues()[0] > smallest;
}

bool LightCurveFit::trusted() const {
  return std::none_of(remarks.begin(), remarks.end(), voids_trust);
}

int LightCurveFit::mistrusted_epochs() const {
  return static_cast<int>(
      std::count_if(epochs.begin(), epochs.end(), [](const FittedEpoch& epoch) { return epoch.mistrusted; }));
}

LightCurveFit fit_light_curve(const LightCurve& light_curve, const Supernova& supernova,
                              const PreparedTemplate& prepared, const PassbandCatalogue& catalogue,
                              const Extinction& dust, const FitOptions& options) {
  check(supernova);
  LightCurveFit fit;
  fit.supernova = light_curve.supernova;
  fit.survey = light_curve.survey;
  fit.z_helio = supernova.z_helio;
  const ObservedBands observed =
      observed_bands(light_curve, supernova, prepared, catalogue, dust, options.template_scatter);
  fit.bands_left_out = observed.left_out;
  if (observed.observations.empty()) {
    fit.remarks = {Remark::no_usable_epoch};
    return fit;
  }
  std::optional<double> guess;
  if (std::isfinite(supernova.peak_mjd_guess)) guess = supernova.peak_mjd_guess - observed.reference_mjd;
  const std::vector<Start> starts = scan(observed, options, guess);
  const Problem problem{observed, prepared.model(), options, window_of(observed, options)};
  const std::vector<Candidate> solutions = candidates(problem, starts);
  if (solutions.empty()) {
    fit.remarks = {starts.empty() ? Remark::no_positive_flux : Remark::no_usable_epoch};
    return fit;
  }
  if (!is_definite(solutions.front().solution.covariance)) {
    fit.remarks = {Remark::undetermined};
    return fit;
  }
  fill(problem, light_curve, prepared, solutions, fit);
  return fit;
}

}  // namespace thirdrung
