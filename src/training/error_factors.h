#pragma once

#include <span>
#include <string>
#include <vector>

#include "training/fitted_set.h"
#include "training/scatter_fit.h"

namespace thirdrung {

/// Factor that the measured errors of one passband of one survey should be multiplied by, as they are.
struct ErrorFactor {
  std::string survey, passband;
  double factor = 1;
  double error = 0;  ///< 1σ, the others free, from the expected curvature without its terms between bands.
  int supernovae = 0, epochs = 0;
};

/// What to do about the template's own scatter while the factors are estimated.
enum class TemplateScatter { estimated_along, held };

/// Factors on the measured errors of all passbands, by restricted likelihood (scatter_likelihood.h): what a survey's
/// errors leave out (or count twice) shows in the epochs whose measured error exceeds the template's scatter. Every
/// epoch counts in full.
std::vector<ErrorFactor> error_factors(const SpectralTemplate& model, std::span<const TrainingSupernova> supernovae,
                                       std::span<const SupernovaUnknowns> unknowns, const UnknownsPrior& prior,
                                       TemplateScatter scatter, const ScatterOptions& options, int threads);

/// The same for fitted supernovae, the template's scatter held, priors of s and c too wide to count, and without single
/// wild epochs: those that are further off than 4.5 of all their errors, a common offset of their band taken out. That
/// is judged by errors with the factors found, which are sought anew until they settle.
/// @param model without scatter, if the fits were to do without.
std::vector<ErrorFactor> error_factors_of_fits(const SpectralTemplate& model, const FittedSet& set, int threads);

}  // namespace thirdrung
