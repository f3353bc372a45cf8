#pragma once

#include <optional>
#include <span>
#include <string>
#include <vector>

#include "lightcurve/fit.h"
#include "template/trained_template.h"
#include "training/cross_validation.h"
#include "training/error_factors.h"
#include "training/population.h"
#include "training/selection.h"
#include "training/template_bases.h"
#include "training/trainer.h"
#include "training/uncertainty.h"
#include "training/zero_point_offsets.h"

namespace thirdrung {

/// All settings of a training run.
struct TrainingSetup {
  std::string name = "template";
  TemplateBasesOptions bases;
  TrainingCuts cuts;
  TrainerOptions trainer;
  CrossValidationOptions cross_validation;
  bool choose_smoothing = true;  ///< By cross-validation; else the strengths given are used.
  bool out_of_fold = true;       ///< Also fit every supernova with a template that has not seen it.
  int covariance_modes = 250;
  std::string gauge_b, gauge_v;  ///< Passband ids of rest-frame Bessell B and V.
  FitOptions fit;                ///< Of the out-of-fold light curves.
};

/// Supernovae of surveys that had no part in the training, fitted with the finished template.
struct CheckFits {
  std::vector<ZeroPointOffset> offsets;    ///< That their light curves prefer.
  std::vector<ErrorFactor> error_factors;  ///< That they prefer after those offsets, the template's scatter held.
  LightCurveFits as_given;
  LightCurveFits with_offsets;  ///< After those offsets have been added to their magnitudes.
  LightCurveFits with_factors;  ///< And their errors multiplied by the factors.
};

/// Everything a training run yields.
struct TrainingResult {
  TrainedTemplate trained;
  TrainingSelection selection;                ///< Who was trained on, and who was left out and why.
  TrainingState state;                        ///< At the optimum.
  Smoothness smoothness;                      ///< As used.
  int folds = 5;                              ///< Of cross-validation and out-of-fold fits.
  std::vector<std::string> spectra_left_out;  ///< "reason: count".
  TrainingPopulation population;              ///< At the optimum.
  CrossValidationResult cross_validation;
  Eigen::MatrixXd covariance;              ///< Of all coefficients.
  std::vector<ZeroPointOffset> offsets;    ///< That the data would prefer.
  std::vector<ErrorFactor> error_factors;  ///< On the errors that were used, that the data would prefer.
  LightCurveFits out_of_fold;  ///< Of all candidates; those outside the training set were never seen by any template.
  std::vector<SpectralTemplate> fold_templates;
  CheckFits check;
  std::vector<std::string> warnings;  ///< What is undetermined or doubtful, in sentences.
  std::vector<std::string> log;
};

/// Trains a template: chooses the supernovae, solves for template and supernovae together, chooses the smoothing,
/// estimates scatter, covariance and calibration responses, and fits every supernova out of fold.
///
/// Throws NoResultError if the data cannot determine a template at all (too few supernovae, no blue band).
TrainingResult run_training(std::span<const TrainingCandidate> candidates, std::vector<TrainingSpectrum> spectra,
                            const PassbandCatalogue& catalogue, const std::optional<Spectrum>& standard_star,
                            const Extinction& dust, const TrainingSetup& setup);

/// Light-curve fits of candidates with one template, by the options of the setup.
LightCurveFits fit_candidates(std::span<const TrainingCandidate> candidates, const SpectralTemplate& model,
                              const PassbandCatalogue& catalogue, const Extinction& dust, const TrainingSetup& setup);

/// Fits supernovae of other surveys with a trained template, as given and with the zero-point offsets that they prefer.
CheckFits check_on_other_surveys(std::span<const TrainingCandidate> candidates, const SpectralTemplate& model,
                                 const PassbandCatalogue& catalogue, const Extinction& dust,
                                 const TrainingSetup& setup);

/// Doubts about a training set, in sentences: few supernovae, one survey, one redshift, no blue or red band.
std::vector<std::string> training_set_warnings(std::span<const TrainingSupernova> supernovae);

}  // namespace thirdrung
