#include "training/trainer.h"

#include <fmt/format.h>

#include <Eigen/Cholesky>
#include <Eigen/LU>
#include <algorithm>
#include <cmath>
#include <limits>

#include "base/constants.h"
#include "base/parallel.h"
#include "training/time_scale.h"

namespace thirdrung {

namespace {

Eigen::VectorXd observed_flux(const TrainingSupernova& sn) {
  Eigen::VectorXd out(static_cast<Eigen::Index>(sn.epochs.size()));
  for (std::size_t e = 0; e < sn.epochs.size(); ++e) out(static_cast<Eigen::Index>(e)) = sn.epochs[e].flux;
  return out;
}

SupernovaUnknowns moved(const SupernovaUnknowns& at, const Eigen::Vector4d& step) {
  return {at.t_0 + step(0), at.m_b + step(1), at.s + step(2), at.c + step(3)};
}

/// Keeps a step within what the linear model can bear.
Eigen::Vector4d limited(const Eigen::Vector4d& step, const SupernovaUnknowns& at) {
  const Eigen::Vector4d most(3.0, 0.7, 0.15, 0.4);
  double shrink = 1;
  for (int k = 0; k < 4; ++k) shrink = std::min(shrink, most(k) / std::max(std::abs(step(k)), 1e-12));
  Eigen::Vector4d out = step * std::min(1.0, shrink);
  out(2) = std::clamp(at.s + out(2), 0.4, 1.7) - at.s;
  return out;
}

void add_prior(const UnknownsPrior& prior, const SupernovaUnknowns& at, Eigen::Matrix4d& normal,
               Eigen::Vector4d& gradient) {
  normal(2, 2) += 1 / (prior.s_width * prior.s_width);
  normal(3, 3) += 1 / (prior.c_width * prior.c_width);
  gradient(2) += (prior.s_mean - at.s) / (prior.s_width * prior.s_width);
  gradient(3) += (prior.c_mean - at.c) / (prior.c_width * prior.c_width);
}

/// The noise of every supernova at the start of a step, by which the step is judged.
struct Yardstick {
  std::vector<SupernovaNoise> noise;
  std::vector<Eigen::VectorXd> flux;
};

/// ½ r^T C^−1 r of one supernova with C held, its unknowns settled by a few Gauss–Newton steps of their own, so that
/// the curvature between them and the coefficients does not count against a step.
double settle_unknowns(const SpectralTemplate& model, const TrainingSupernova& sn, const SupernovaNoise& noise,
                       const Eigen::VectorXd& noise_flux, const UnknownsPrior& prior, SupernovaUnknowns& at) {
  const Eigen::VectorXd data = observed_flux(sn);
  SupernovaModel values = evaluate_supernova(model, sn, at);
  double now = half_chi2(sn, noise, noise_flux, data - values.flux, at, prior);
  for (int step = 0; step < 4; ++step) {
    const Eigen::MatrixXd weighted = apply_inverse(sn, noise, noise_flux, values.by_unknowns);
    Eigen::Matrix4d normal = values.by_unknowns.transpose() * weighted;
    Eigen::Vector4d gradient = weighted.transpose() * (data - values.flux);
    add_prior(prior, at, normal, gradient);
    const SupernovaUnknowns next = moved(at, limited(Eigen::LLT<Eigen::Matrix4d>(normal).solve(gradient), at));
    SupernovaModel next_values = evaluate_supernova(model, sn, next);
    const double then = half_chi2(sn, noise, noise_flux, data - next_values.flux, next, prior);
    if (!(then < now)) break;
    const bool settled = now - then < 1e-6;
    at = next;
    values = std::move(next_values);
    now = then;
    if (settled) break;
  }
  return now;
}

/// The objective at a trial template, the unknowns and warps settled on the way.
double objective(const TrainingState& state, const SpectralTemplate& model, std::vector<SupernovaUnknowns>& unknowns,
                 std::vector<TrainingSpectrum>& spectra, std::span<const TrainingSupernova> supernovae,
                 const Yardstick& yardstick, const TrainerOptions& options) {
  std::vector<double> each(supernovae.size());
  parallel_for(supernovae.size(), options.threads, [&](std::size_t k) {
    each[k] = settle_unknowns(model, supernovae[k], yardstick.noise[k], yardstick.flux[k], options.prior, unknowns[k]);
  });
  double sum = half_smoothness(model, options.smoothness) + half_gauge(model, options.gauge_error);
  for (const double value : each) sum += value;
  if (!spectra.empty()) {
    fit_warps(model, spectra, state.spectra_scatter, options.spectra_correlation_length, options.threads);
    sum += add_spectra(model, spectra, state.spectra_scatter, options.spectra_correlation_length, options.threads,
                       nullptr);
  }
  return sum;
}

Yardstick yardstick_of(const TrainingState& state, std::span<const TrainingSupernova> supernovae, int threads) {
  Yardstick out;
  out.noise.resize(supernovae.size());
  out.flux.resize(supernovae.size());
  parallel_for(supernovae.size(), threads, [&](std::size_t k) {
    out.flux[k] = evaluate_supernova(state.model, supernovae[k], state.unknowns[k]).flux;
    out.noise[k] = supernova_noise(state.model, supernovae[k], state.unknowns[k], out.flux[k], state.robust_weights[k]);
  });
  return out;
}

/// Brings a template that a step has led off the bent gauge conditions back onto them, along the directions that cost
/// least by the system of `factor`. Changes `model`, and returns its coefficients.
template <typename Factor>
Eigen::VectorXd back_into_gauge(SpectralTemplate& model, const Factor& factor) {
  const CoefficientLayout layout(model);
  Eigen::VectorXd at = layout.gather(model);
  for (int pass = 0; pass < 2; ++pass) {
    const GaugeConditions conditions = gauge_conditions(model);
    const Eigen::MatrixXd along = factor.solve(conditions.gradient);
    at -= along * Eigen::MatrixXd(conditions.gradient.transpose() * along).ldlt().solve(conditions.value);
    layout.scatter(at, model);
  }
  return at;
}

/// Sees to it that what does not know the time scale does not set it, in a system without the gauge.
void hold_time_scale(const SpectralTemplate& model, const TrainerOptions& options,
                     std::span<const EliminatedSupernova> eliminated, NormalEquations& system) {
  const TimeScale scale = time_scale(model);
  const HeldTimeScale held(scale, system.hessian.selfadjointView<Eigen::Lower>() * scale.direction);
  double cost = 0;
  for (const EliminatedSupernova& one : eliminated) cost += time_scale_cost(one.local_inverse(2, 2), options.prior);
  NormalEquations smooth(static_cast<int>(system.gradient.size()));
  add_smoothness(model, options.smoothness, smooth);
  const Eigen::VectorXd before = system.spread;
  held.correct_spread(cost, system.spread);
  system.spread += held.part_along(smooth.gradient);
  system.gradient -= system.spread - before;
}

/// Gauss–Newton until the objective settles.
void iterate(TrainingState& state, std::span<const TrainingSupernova> supernovae, const TrainerOptions& options) {
  const CoefficientLayout layout(state.model);
  double damping = 1e-6;
  for (int iteration = 0; iteration < options.iterations; ++iteration) {
    const Yardstick yardstick = yardstick_of(state, supernovae, options.threads);
    const double before = objective(state, state.model, state.unknowns, state.spectra, supernovae, yardstick, options);
    std::vector<EliminatedSupernova> eliminated;
    const NormalEquations system = assemble(state, supernovae, options, eliminated);
    // The gauge is orders of magnitude stiffer than anything else: damping in proportion to it would freeze whatever it
    // touches, so it does not count there.
    NormalEquations gauge(layout.size());
    add_gauge(state.model, options.gauge_error, gauge);
    const Eigen::VectorXd curvature = system.hessian.diagonal() - gauge.hessian.diagonal();
    const Eigen::VectorXd start = layout.gather(state.model);
    bool accepted = false;
    double after = before;
    for (int attempt = 0; attempt < 8 && !accepted; ++attempt) {
      Eigen::MatrixXd damped = system.hessian;
      damped.diagonal() += damping * curvature;
      const Eigen::LLT<Eigen::Ref<Eigen::MatrixXd>> factor(damped);
      if (factor.info() != Eigen::Success) {
        damping = std::max(damping * 10, 1e-6);
        continue;
      }
      Eigen::VectorXd step = factor.solve(system.gradient);
      SpectralTemplate trial = state.model;
      layout.scatter(start + step, trial);
      step = back_into_gauge(trial, factor) - start;
      std::vector<SupernovaUnknowns> trial_unknowns(state.unknowns.size());
      for (std::size_t k = 0; k < trial_unknowns.size(); ++k) {
        trial_unknowns[k] = moved(state.unknowns[k], limited(eliminated[k].step(step), state.unknowns[k]));
      }
      std::vector<TrainingSpectrum> trial_spectra = state.spectra;
      after = objective(state, trial, trial_unknowns, trial_spectra, supernovae, yardstick, options) +
              system.spread.dot(step);
      accepted = std::isfinite(after) && after < before + 1e-9 * std::abs(before);
      if (accepted) {
        state.model = std::move(trial);
        state.unknowns = std::move(trial_unknowns);
        state.spectra = std::move(trial_spectra);
        damping = std::max(1e-9, damping / 10);
      } else {
        damping = std::max(damping * 30, 1e-4);
      }
    }
    if (!accepted) {
      state.log.push_back(fmt::format("  step {}: none found that lowers {:.2f}", iteration + 1, before));
      break;
    }
    parallel_for(supernovae.size(), options.threads, [&](std::size_t k) {
      state.robust_weights[k] =
          robust_weights_of(state.model, supernovae[k], state.unknowns[k], options.robust_degrees);
    });
    state.log.push_back(
        fmt::format("  step {}: {:.3f} -> {:.3f}, damping {:.1e}", iteration + 1, before, after, damping));
    if (before - after < options.tolerance) break;
  }
}

}  // namespace

Eigen::VectorXd robust_weights_of(const SpectralTemplate& model, const TrainingSupernova& sn,
                                  const SupernovaUnknowns& at, double degrees) {
  return robust_weights_at(model, sn, at, evaluate_supernova(model, sn, at).flux, degrees);
}

Eigen::VectorXd robust_weights_at(const SpectralTemplate& model, const TrainingSupernova& sn,
                                  const SupernovaUnknowns& at, const Eigen::VectorXd& flux, double degrees) {
  const Eigen::VectorXd ones = Eigen::VectorXd::Ones(flux.size());
  const SupernovaNoise noise = supernova_noise(model, sn, at, flux, ones);
  Eigen::VectorXd residual = observed_flux(sn) - flux;
  Eigen::VectorXd out = ones;
  for (std::size_t b = 0; b < sn.bands.size(); ++b) {
    const auto begin = static_cast<Eigen::Index>(sn.bands[b].begin);
    const auto count = static_cast<Eigen::Index>(sn.bands[b].end) - begin;
    const double square = noise.colour_scatter[b] * noise.colour_scatter[b];
    // Two passes, so that one wild epoch does not drag the band's offset along.
    for (int pass = 0; pass < 2; ++pass) {
      double top = 0;
      double bottom = 1 / std::max(square, 1e-12);
      for (Eigen::Index i = begin; i < begin + count; ++i) {
        top += out(i) * flux(i) * residual(i) / noise.variance(i);
        bottom += out(i) * flux(i) * flux(i) / noise.variance(i);
      }
      const double offset = top / bottom;
      for (Eigen::Index i = begin; i < begin + count; ++i) {
        const double left = residual(i) - offset * flux(i);
        out(i) = (degrees + 1) / (degrees + left * left / noise.variance(i));
      }
    }
  }
  // Never above one: a robust weight may only take trust away.
  return out.cwiseMin(1.0);
}

SupernovaUnknowns scan_supernova(const SpectralTemplate& model, const TrainingSupernova& sn,
                                 const UnknownsPrior& prior) {
  const Eigen::VectorXd data = observed_flux(sn);
  SupernovaUnknowns best;
  double best_chi2 = std::numeric_limits<double>::infinity();
  for (const double s : {0.8, 1.0, 1.15}) {
    for (int day = -6; day <= 6; ++day) {
      SupernovaUnknowns at{sn.t_0_guess + day, 0, s, 0};
      const Eigen::VectorXd flux = evaluate_supernova(model, sn, at).flux;
      // Measured error plus a tenth of the flux of the brightest-like epoch: the start is no better than that.
      const Eigen::VectorXd weight = data.unaryExpr([](double f) { return 0.15 * f; }).cwiseAbs2().array() + 1e-12;
      double top = 0;
      double bottom = 0;
      double square = 0;
      for (Eigen::Index i = 0; i < data.size(); ++i) {
        const double error = sn.epochs[static_cast<std::size_t>(i)].flux_error;
        const double w = 1 / (error * error + weight(i) + 1e-4 * data.cwiseAbs2().maxCoeff());
        top += w * flux(i) * data(i);
        bottom += w * flux(i) * flux(i);
        square += w * data(i) * data(i);
      }
      const double amplitude = top / bottom;
      if (!(amplitude > 0)) continue;
      const double pull = (s - prior.s_mean) / prior.s_width;
      const double chi2 = square - amplitude * top + pull * pull;
      if (chi2 < best_chi2) {
        best_chi2 = chi2;
        best = at;
        best.m_b = -std::log(amplitude) / constants::ln_flux_per_mag;
      }
    }
  }
  return best;
}

Eigen::Matrix4d fit_supernova(const SpectralTemplate& model, const TrainingSupernova& sn, const UnknownsPrior& prior,
                              double robust_degrees, SupernovaUnknowns& at, Eigen::VectorXd& robust_weight,
                              double* minus_log_likelihood) {
  const Eigen::VectorXd data = observed_flux(sn);
  Eigen::Matrix4d normal;
  double settled = 0;
  SupernovaModel values = evaluate_supernova(model, sn, at);
  for (int step = 0; step < 30; ++step) {
    const SupernovaNoise noise = supernova_noise(model, sn, at, values.flux, robust_weight);
    const Eigen::VectorXd residual = data - values.flux;
    const Eigen::MatrixXd weighted = apply_inverse(sn, noise, values.flux, values.by_unknowns);
    normal = values.by_unknowns.transpose() * weighted;
    Eigen::Vector4d gradient = weighted.transpose() * residual;
    add_prior(prior, at, normal, gradient);
    const Eigen::LLT<Eigen::Matrix4d> factor(normal);
    Eigen::Vector4d move = limited(factor.solve(gradient), at);
    const double before = half_chi2(sn, noise, values.flux, residual, at, prior);
    SupernovaUnknowns next = moved(at, move);
    SupernovaModel next_values = evaluate_supernova(model, sn, next);
    for (int half = 0; half < 6; ++half) {
      if (half_chi2(sn, noise, values.flux, data - next_values.flux, next, prior) <= before + 1e-9) break;
      move *= 0.4;
      next = moved(at, move);
      next_values = evaluate_supernova(model, sn, next);
    }
    at = next;
    values = std::move(next_values);
    if (robust_degrees > 0) robust_weight = robust_weights_at(model, sn, at, values.flux, robust_degrees);
    settled = std::sqrt(std::max(0.0, move.dot(normal * move)));
    if (settled < 1e-4) break;
  }
  if (minus_log_likelihood) {
    const SupernovaNoise noise = supernova_noise(model, sn, at, values.flux, robust_weight);
    const Eigen::VectorXd residual = data - values.flux;
    *minus_log_likelihood =
        half_chi2(sn, noise, values.flux, residual, at, prior) + 0.5 * log_determinant(sn, noise, values.flux) +
        Eigen::LLT<Eigen::Matrix4d>(normal).matrixL().toDenseMatrix().diagonal().array().log().sum();
  }
  return normal.inverse();
}

NormalEquations assemble(TrainingState& state, std::span<const TrainingSupernova> supernovae,
                         const TrainerOptions& options, std::vector<EliminatedSupernova>& eliminated) {
  NormalEquations system = eliminate_supernovae(state.model, supernovae, state.unknowns, state.robust_weights,
                                                options.prior, options.threads, eliminated);
  add_spectra_and_smoothness(state, options, system);
  hold_time_scale(state.model, options, eliminated, system);
  add_gauge(state.model, options.gauge_error, system);
  return system;
}

void add_spectra_and_smoothness(TrainingState& state, const TrainerOptions& options, NormalEquations& into) {
  if (!state.spectra.empty()) {
    add_spectra(state.model, state.spectra, state.spectra_scatter, options.spectra_correlation_length, options.threads,
                &into);
  }
  add_smoothness(state.model, options.smoothness, into);
}

void train(TrainingState& state, std::span<const TrainingSupernova> supernovae, const TrainerOptions& options) {
  if (state.unknowns.size() != supernovae.size()) {
    state.unknowns.resize(supernovae.size());
    state.robust_weights.resize(supernovae.size());
    parallel_for(supernovae.size(), options.threads, [&](std::size_t k) {
      state.robust_weights[k] = Eigen::VectorXd::Ones(static_cast<Eigen::Index>(supernovae[k].epochs.size()));
      state.unknowns[k] = scan_supernova(state.model, supernovae[k], options.prior);
      fit_supernova(state.model, supernovae[k], options.prior, options.robust_degrees, state.unknowns[k],
                    state.robust_weights[k]);
    });
  }
  if (!state.spectra.empty()) {
    fit_warps(state.model, state.spectra, state.spectra_scatter, options.spectra_correlation_length, options.threads);
  }
  for (int round = 0; round < options.scatter_rounds; ++round) {
    iterate(state, supernovae, options);
    const double likelihood =
        fit_scatter(state.model, supernovae, state.unknowns, options.prior, options.scatter, options.threads);
    if (!state.spectra.empty()) state.spectra_scatter = spectra_scatter(state.model, state.spectra);
    state.log.push_back(fmt::format("round {}: restricted log-likelihood {:.2f}, spectra scatter {:.4f}", round + 1,
                                    likelihood, state.spectra_scatter));
  }
  iterate(state, supernovae, options);
}

}  // namespace thirdrung
