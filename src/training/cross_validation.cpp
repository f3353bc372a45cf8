#include "training/cross_validation.h"

#include <Eigen/Cholesky>
#include <array>
#include <cmath>

#include "base/parallel.h"

namespace thirdrung {

namespace {

/// The systems of all folds without smoothing, at one state.
class FoldSystems {
 public:
  FoldSystems(const TrainingState& state, std::span<const TrainingSupernova> supernovae, const TrainerOptions& trainer,
              int folds)
      : state_(state), supernovae_(supernovae), trainer_(trainer), members_(static_cast<std::size_t>(folds)) {
    for (std::size_t k = 0; k < supernovae.size(); ++k)
      members_[static_cast<std::size_t>(fold_of(k, folds))].push_back(k);
    for (const auto& members : members_) {
      std::vector<TrainingSupernova> part;
      std::vector<SupernovaUnknowns> unknowns;
      std::vector<Eigen::VectorXd> weights;
      for (const std::size_t k : members) {
        part.push_back(supernovae[k]);
        unknowns.push_back(state.unknowns[k]);
        weights.push_back(state.robust_weights[k]);
      }
      std::vector<EliminatedSupernova> ignored;
      data_.push_back(
          eliminate_supernovae(state.model, part, unknowns, weights, trainer.prior, trainer.threads, ignored));
    }
    common_.emplace_back(CoefficientLayout(state.model).size());
    if (!state.spectra.empty()) {
      std::vector<TrainingSpectrum> spectra = state.spectra;
      add_spectra(state.model, spectra, state.spectra_scatter, trainer.spectra_correlation_length, trainer.threads,
                  &common_.front());
    }
    add_gauge(state.model, 2e-3, common_.front());
    for (const NormalEquations& part : data_) common_.front().add(part);
  }

  /// Score of every held-out supernova; empty if the system cannot be solved.
  std::vector<double> score(const Smoothness& smoothness) const {
    std::vector<double> each(supernovae_.size());
    for (std::size_t fold = 0; fold < members_.size(); ++fold) {
      NormalEquations system = common_.front();
      system.hessian -= data_[fold].hessian;
      system.gradient -= data_[fold].gradient;
      add_smoothness(state_.model, smoothness, system);
      const Eigen::LLT<Eigen::Ref<Eigen::MatrixXd>> factor(system.hessian);
      if (factor.info() != Eigen::Success) return {};
      const CoefficientLayout layout(state_.model);
      SpectralTemplate model = state_.model;
      layout.scatter(layout.gather(model) + factor.solve(system.gradient), model);
      parallel_for(members_[fold].size(), trainer_.threads, [&](std::size_t i) {
        const std::size_t k = members_[fold][i];
        SupernovaUnknowns at = state_.unknowns[k];
        Eigen::VectorXd weight = state_.robust_weights[k];
        fit_supernova(model, supernovae_[k], trainer_.prior, 0.0, at, weight, &each[k]);
      });
    }
    return each;
  }

 private:
  const TrainingState& state_;
  std::span<const TrainingSupernova> supernovae_;
  const TrainerOptions& trainer_;
  std::vector<std::vector<std::size_t>> members_;
  std::vector<NormalEquations> data_;
  std::vector<NormalEquations> common_;
};

double total(const std::vector<double>& each) {
  double sum = 0;
  for (const double value : each) sum += value;
  return sum;
}

/// Fall of the summed score from one smoothing to another, and its error from the scatter over supernovae.
struct Gain {
  double value = 0, error = 0;
};

Gain gain_of(const std::vector<double>& before, const std::vector<double>& after) {
  Gain out;
  const auto n = static_cast<double>(before.size());
  for (std::size_t k = 0; k < before.size(); ++k) out.value += before[k] - after[k];
  double square = 0;
  for (std::size_t k = 0; k < before.size(); ++k) {
    const double off = before[k] - after[k] - out.value / n;
    square += off * off;
  }
  out.error = std::sqrt(square * n / (n - 1));
  return out;
}

struct Strength {
  const char* kind;
  void (*scale)(Smoothness&, double);
};

constexpr std::array<Strength, 4> strengths = {
    Strength{"phi along phase", [](Smoothness& s, double f) { s.phi_phase *= f; }},
    Strength{"phi along wavelength", [](Smoothness& s, double f) { s.phi_wavelength *= f; }},
    Strength{"gamma",
             [](Smoothness& s, double f) {
               s.gamma_phase *= f;
               s.gamma_wavelength *= f;
             }},
    Strength{"colour law", [](Smoothness& s, double f) { s.colour *= f; }},
};

}  // namespace

int fold_of(std::size_t supernova, int folds) {
  return static_cast<int>(supernova % static_cast<std::size_t>(folds));
}

CrossValidationResult cross_validate(const TrainingState& state, std::span<const TrainingSupernova> supernovae,
                                     const TrainerOptions& trainer, const CrossValidationOptions& options) {
  const FoldSystems systems(state, supernovae, trainer, options.folds);
  CrossValidationResult out;
  out.best = trainer.smoothness;
  std::vector<double> best = systems.score(out.best);
  out.points.push_back({"start", out.best, total(best), 0, 0, true});
  for (int sweep = 0; sweep < options.sweeps; ++sweep) {
    bool moved = false;
    for (const Strength& strength : strengths) {
      for (const double factor : {options.factor, 1 / options.factor}) {
        for (;;) {
          Smoothness trial = out.best;
          strength.scale(trial, factor);
          std::vector<double> score = systems.score(trial);
          if (score.empty()) break;
          const Gain gain = gain_of(best, score);
          // The smoother of two templates stands unless the other predicts clearly better (the one-standard-error rule
          // of Breiman et al. 1984, with the error of the paired difference).
          const bool taken = factor > 1 ? gain.value > 0 : gain.value > options.needed_sigma * gain.error;
          out.points.push_back({strength.kind, trial, total(score), gain.value, gain.error, taken});
          if (!taken) break;
          best = std::move(score);
          out.best = trial;
          moved = true;
        }
      }
    }
    if (!moved) break;
  }
  return out;
}

}  // namespace thirdrung
