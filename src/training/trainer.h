#pragma once

#include <Eigen/Core>
#include <span>
#include <string>
#include <vector>

#include "training/normal_equations.h"
#include "training/penalties.h"
#include "training/scatter_fit.h"
#include "training/training_spectra.h"

namespace thirdrung {

/// How the trainer iterates.
struct TrainerOptions {
  Smoothness smoothness;
  UnknownsPrior prior;
  ScatterOptions scatter;
  double gauge_error = 1e-5;
  double robust_degrees = 6;               ///< Degrees of freedom of the Student-t that sets the robust weights.
  int iterations = 12;                     ///< At most, of Gauss–Newton steps between two estimates of the scatter.
  int scatter_rounds = 3;                  ///< How often ε and κ are estimated anew.
  double tolerance = 0.05;                 ///< Stop when the objective falls by less than this (in units of χ²/2).
  double spectra_correlation_length = 50;  ///< [angstrom].
  int threads = 0;
};

/// Everything the trainer solves for.
struct TrainingState {
  SpectralTemplate model;
  std::vector<SupernovaUnknowns> unknowns;
  std::vector<Eigen::VectorXd> robust_weights;
  std::vector<TrainingSpectrum> spectra;
  double spectra_scatter = 0.10;
  std::vector<std::string> log;  ///< One line an iteration.
};

/// First guess of each supernova's unknowns from a coarse scan about its t_0_guess.
SupernovaUnknowns scan_supernova(const SpectralTemplate& model, const TrainingSupernova& sn,
                                 const UnknownsPrior& prior);

/// Fits one supernova's unknowns to a fixed template, noise rebuilt at every step. Robust weights are updated in place,
/// or held if `robust_degrees` is not positive.
/// Returns the 4×4 covariance; `half_objective` gets −ln of the marginal likelihood (Laplace), for cross-validation.
Eigen::Matrix4d fit_supernova(const SpectralTemplate& model, const TrainingSupernova& sn, const UnknownsPrior& prior,
                              double robust_degrees, SupernovaUnknowns& at, Eigen::VectorXd& robust_weight,
                              double* minus_log_likelihood = nullptr);

/// Gauss–Newton with a trust region on all coefficients and all supernovae together; a step is kept only if the
/// objective, with the noise held as it was before the step, falls. Alternates with the scatter estimate.
void train(TrainingState& state, std::span<const TrainingSupernova> supernovae, const TrainerOptions& options);

/// The assembled system at the present state: data, spectra, smoothing and gauge.
NormalEquations assemble(TrainingState& state, std::span<const TrainingSupernova> supernovae,
                         const TrainerOptions& options, std::vector<EliminatedSupernova>& eliminated);

/// Adds the part of spectra and of smoothing to a system.
void add_spectra_and_smoothness(TrainingState& state, const TrainerOptions& options, NormalEquations& into);

/// Robust weights (ν + 1)/(ν + x²) from residuals x standardised by the noise of their epoch, after the band's common
/// offset.
Eigen::VectorXd robust_weights_of(const SpectralTemplate& model, const TrainingSupernova& sn,
                                  const SupernovaUnknowns& at, double degrees);
/// The same where the model's fluxes are known.
Eigen::VectorXd robust_weights_at(const SpectralTemplate& model, const TrainingSupernova& sn,
                                  const SupernovaUnknowns& at, const Eigen::VectorXd& flux, double degrees);

}  // namespace thirdrung
