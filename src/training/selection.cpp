#include "training/selection.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "base/parallel.h"

namespace thirdrung {

namespace {

/// Date of B maximum to begin with: the table's, or the brightest well-measured epoch.
double first_guess(const TrainingCandidate& candidate) {
  if (std::isfinite(candidate.supernova.peak_mjd_guess)) return candidate.supernova.peak_mjd_guess;
  double best = 0;
  double date = candidate.light_curve.epochs.front().mjd;
  for (const Epoch& epoch : candidate.light_curve.epochs) {
    if (epoch.flux > best && epoch.flux > 5 * epoch.flux_error) {
      best = epoch.flux;
      date = epoch.mjd;
    }
  }
  return date;
}

/// Why the photometry cannot be used, or "" if it can.
std::string coverage_fault(const TrainingSupernova& sn, double t_0, const TrainingCuts& cuts) {
  if (static_cast<int>(sn.bands.size()) < cuts.least_bands)
    return fmt::format("fewer than {} usable bands", cuts.least_bands);
  if (static_cast<int>(sn.epochs.size()) < cuts.least_epochs)
    return fmt::format("fewer than {} usable epochs", cuts.least_epochs);
  double first = 1e9;
  int near_peak = 0;
  for (const TrainingEpoch& epoch : sn.epochs) {
    const double phase = (epoch.mjd - t_0) / (1 + sn.z_helio);
    first = std::min(first, phase);
    if (phase > -5 && phase < 35) ++near_peak;
  }
  if (first > cuts.first_phase) return fmt::format("first epoch at {:+.1f} d", first);
  if (near_peak < cuts.least_near_peak) return fmt::format("{} epochs between -5 and +35 d", near_peak);
  return "";
}

std::string shape_fault(const SpectralTemplate& model, const TrainingSupernova& sn, const SupernovaUnknowns& at,
                        const TrainingCuts& cuts, const UnknownsPrior& prior) {
  if (at.s < cuts.s_min || at.s > cuts.s_max) return fmt::format("stretch {:.2f}", at.s);
  if (std::abs(at.c - prior.c_mean) > cuts.most_colour) return fmt::format("colour {:+.2f}", at.c);
  const double chi2 = chi2_per_dof(model, sn, at);
  if (chi2 > cuts.most_chi2_per_dof) return fmt::format("peculiar: chi2 per degree of freedom {:.1f}", chi2);
  return "";
}

struct Round {
  std::vector<TrainingSupernova> supernovae;
  std::vector<std::size_t> candidate;
  std::vector<SupernovaUnknowns> unknowns;
  std::vector<Eigen::VectorXd> weights;
  std::vector<SetAside> left_out;
};

class Selector {
 public:
  Selector(std::span<const TrainingCandidate> candidates, const SpectralTemplate& start,
           const PassbandCatalogue& catalogue, const Extinction& dust, const TrainingCuts& cuts,
           const TrainerOptions& options)
      : candidates_(candidates), start_(start), catalogue_(catalogue), dust_(dust), cuts_(cuts), options_(options) {
    for (const TrainingCandidate& candidate : candidates) t_0_.push_back(first_guess(candidate));
  }

  /// Prepares every candidate about its present date; with `model`, also fits it and judges the fit.
  Round prepare(const SpectralTemplate* model) {
    std::vector<TrainingSupernova> all(candidates_.size());
    std::vector<SupernovaUnknowns> unknowns(candidates_.size());
    std::vector<Eigen::VectorXd> weights(candidates_.size());
    std::vector<std::string> fault(candidates_.size());
    parallel_for(candidates_.size(), options_.threads, [&](std::size_t i) {
      if (candidates_[i].supernova.mw_ebv > cuts_.most_reddening) {
        fault[i] = fmt::format("Milky Way reddening {:.2f}", candidates_[i].supernova.mw_ebv);
        return;
      }
      all[i] = prepare_supernova(with_floor(candidates_[i].light_curve), candidates_[i].supernova, t_0_[i], start_,
                                 catalogue_, dust_, {cuts_.earliest, cuts_.latest});
      fault[i] = coverage_fault(all[i], t_0_[i], cuts_);
      if (!fault[i].empty() || !model) return;
      weights[i] = Eigen::VectorXd::Ones(static_cast<Eigen::Index>(all[i].epochs.size()));
      unknowns[i] = scan_supernova(*model, all[i], options_.prior);
      fit_supernova(*model, all[i], options_.prior, options_.robust_degrees, unknowns[i], weights[i]);
      t_0_[i] = unknowns[i].t_0;
      fault[i] = coverage_fault(all[i], t_0_[i], cuts_);
      if (fault[i].empty()) fault[i] = shape_fault(*model, all[i], unknowns[i], cuts_, options_.prior);
    });
    Round out;
    for (std::size_t i = 0; i < candidates_.size(); ++i) {
      if (!fault[i].empty()) {
        out.left_out.push_back({candidates_[i].supernova.name, candidates_[i].supernova.survey, fault[i]});
        continue;
      }
      out.supernovae.push_back(std::move(all[i]));
      out.candidate.push_back(i);
      if (model) {
        out.unknowns.push_back(unknowns[i]);
        out.weights.push_back(std::move(weights[i]));
      }
    }
    return out;
  }

  void take_dates(const Round& round, std::span<const SupernovaUnknowns> unknowns) {
    for (std::size_t k = 0; k < round.candidate.size(); ++k) t_0_[round.candidate[k]] = unknowns[k].t_0;
  }

 private:
  LightCurve with_floor(LightCurve light_curve) const {
    for (Epoch& epoch : light_curve.epochs)
      epoch.flux_error = std::hypot(epoch.flux_error, cuts_.error_floor * epoch.flux);
    return light_curve;
  }

  std::span<const TrainingCandidate> candidates_;
  const SpectralTemplate& start_;
  const PassbandCatalogue& catalogue_;
  const Extinction& dust_;
  const TrainingCuts& cuts_;
  const TrainerOptions& options_;
  std::vector<double> t_0_;
};

}  // namespace

double chi2_per_dof(const SpectralTemplate& model, const TrainingSupernova& sn, const SupernovaUnknowns& at) {
  const Eigen::VectorXd flux = evaluate_supernova(model, sn, at).flux;
  Eigen::VectorXd residual(flux.size());
  for (std::size_t e = 0; e < sn.epochs.size(); ++e) {
    residual(static_cast<Eigen::Index>(e)) = sn.epochs[e].flux - flux(static_cast<Eigen::Index>(e));
  }
  const SupernovaNoise noise = supernova_noise(model, sn, at, flux, Eigen::VectorXd::Ones(flux.size()));
  const double chi2 = residual.dot(apply_inverse(sn, noise, flux, residual).col(0));
  return chi2 / std::max(1.0, static_cast<double>(sn.epochs.size()) - 4.0);
}

TrainingSelection select_supernovae(std::span<const TrainingCandidate> candidates, const SpectralTemplate& start,
                                    const PassbandCatalogue& catalogue, const Extinction& dust,
                                    const TrainingCuts& cuts, const TrainerOptions& options) {
  Selector selector(candidates, start, catalogue, dust, cuts, options);
  TrainerOptions coarse = options;
  coarse.scatter_rounds = 1;
  coarse.iterations = 5;
  TrainingState state;
  state.model = start;
  const Round first = selector.prepare(nullptr);
  if (first.supernovae.size() < 10) {
    throw NoResultError(fmt::format(
        "Only {} of {} supernovae have photometry to train on: a template needs at least ten, and hundreds to be good.",
        first.supernovae.size(), candidates.size()));
  }
  train(state, first.supernovae, coarse);
  selector.take_dates(first, state.unknowns);

  coarse.iterations = 4;
  Round second = selector.prepare(&state.model);
  state.unknowns = second.unknowns;
  state.robust_weights = second.weights;
  train(state, second.supernovae, coarse);
  selector.take_dates(second, state.unknowns);

  TrainingSelection out;
  Round last = selector.prepare(&state.model);
  out.supernovae = std::move(last.supernovae);
  out.candidate = std::move(last.candidate);
  out.left_out = std::move(last.left_out);
  out.state = std::move(state);
  out.state.unknowns = std::move(last.unknowns);
  out.state.robust_weights = std::move(last.weights);
  return out;
}

}  // namespace thirdrung
