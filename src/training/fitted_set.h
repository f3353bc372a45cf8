#pragma once

#include <span>
#include <utility>
#include <vector>

#include "lightcurve/fit.h"
#include "training/training_set.h"

namespace thirdrung {

/// Fitted supernovae as the trainer sees them, at their fits.
struct FittedSet {
  std::vector<TrainingSupernova> supernovae;
  std::vector<SupernovaUnknowns> unknowns;
};

/// The fits that tell something of their survey's zero points and errors: with parameters, five epochs or more, and a
/// χ² per degree of freedom within three times the survey's median (or of one, if that is larger). A peculiar supernova
/// does not.
///
/// @param fits any order; each is matched by survey and supernova. @param phases used [d], and within the template's.
FittedSet fitted_set(std::span<const LightCurve> light_curves, std::span<const Supernova> supernovae,
                     std::span<const LightCurveFit> fits, const SpectralTemplate& model,
                     const PassbandCatalogue& catalogue, const Extinction& dust, std::pair<double, double> phases,
                     int threads);

}  // namespace thirdrung
