#pragma once

#include <optional>
#include <span>
#include <vector>

#include "light/passband_catalogue.h"
#include "template/trained_template.h"
#include "training/selection.h"
#include "training/trainer.h"

namespace thirdrung {

/// How the responses are found.
struct ResponseOptions {
  double zero_point_step = 0.01;       ///< By which a zero point is moved [mag].
  double wavelength_step = 5;          ///< By which a passband is moved [angstrom].
  int corrections = 4;                 ///< Chord steps after the first.
  std::vector<std::string> passbands;  ///< Those to be done; empty: all of the training set.
};

/// Response of the coefficients to the calibration of every passband of the training set, the implicit-function theorem
/// at the optimum: d theta = -(dg/dtheta)^-1 (dg/dcalibration) dcalibration.
///
/// The first step is that of the Gauss-Newton Hessian H, noise and robust weights held. They do follow, though, and so
/// does the curvature that H leaves out; g is therefore taken anew at the template reached (SettledSlope) and another
/// step made with H: chord steps (Kelley 1995, Iterative Methods for Linear and Nonlinear Equations, sect. 5.4.1). The
/// gauge holds back a slope of its own at the optimum and turns as the template moves, so that the steps are those on
/// its surface (GaugedStep). How close the answer comes to training again: docs/template.md.
///
/// @param candidate_of the candidate behind each supernova. @param system assembled at the optimum. @param
/// standard_star needed where the catalogue's systems refer to it.
std::vector<CalibrationResponse> calibration_responses(
    const TrainingState& state, std::span<const TrainingSupernova> supernovae,
    std::span<const TrainingCandidate> candidates, std::span<const std::size_t> candidate_of,
    const PassbandCatalogue& catalogue, const std::optional<Spectrum>& standard_star, const Extinction& dust,
    const NormalEquations& system, const TrainerOptions& trainer, const ResponseOptions& options = {});

}  // namespace thirdrung
