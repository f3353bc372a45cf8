#pragma once

#include <optional>
#include <vector>

#include "lightcurve/photometry.h"
#include "simulation/draw_supernova.h"
#include "template/spectral_template.h"

namespace thirdrung {

/// A passband as it truly is, and what its calibration gets wrong.
struct TruePassband {
  Passband curve;
  double depth = 0;        ///< [mag].
  double flux_factor = 1;  ///< Tabulated flux over true flux.
};

/// The bands of a survey as they truly are.
std::vector<TruePassband> true_passbands(const SimulationOptions& options, const SimulatedSurvey& survey);

/// Photometry of one supernova: flux = f (1 + κ n_band + ε n_epoch) (calibration error) + noise, n standard normal,
/// ε(p, λ) and κ(λ) of the template at the band's mean rest-frame wavelength, f the template integrated over the band
/// directly. Visits fall into the seasons of the survey and the phases of both survey and template; all bands are
/// observed in each. Bands that the template does not cover at the supernova's redshift (98% of their light) are not
/// observed.
LightCurve observe(const SimulationOptions& options, const SimulatedSurvey& survey,
                   const std::vector<TruePassband>& passbands, const SupernovaTruth& truth,
                   const SpectralTemplate& model, const Extinction& dust, RandomStream& stream);

/// Whether the light curve has the detections that the survey asks for.
bool is_detected(const SimulatedSurvey& survey, const LightCurve& light_curve);

}  // namespace thirdrung
