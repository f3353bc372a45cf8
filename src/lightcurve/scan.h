#pragma once

#include <optional>
#include <vector>

#include "lightcurve/model_flux.h"

namespace thirdrung {

/// The dates [d from the reference] between which t_0 is sought.
struct Window {
  double first = 0;
  double last = 0;
};
Window window_of(const ObservedBands& observed, const FitOptions& options);

/// A minimum of the scan.
struct Start {
  Parameters at = Parameters::Zero();
  double chi2 = 0;
};

/// Starting points from a scan in t_0 and s at c = 0, best first, at most three.
///
/// All observations count, with errors of 10% of their flux added. Every band's amplitude is solved for linearly, and
/// compared with the common one to within 40%, so that a reddened supernova is not missed. Kept are minima in t_0 with
/// positive amplitude whose χ² is near the best one's.
/// @param guess a further date to try, from the reference date.
std::vector<Start> scan(const ObservedBands& observed, const FitOptions& options, const std::optional<double>& guess);

}  // namespace thirdrung
