#pragma once

#include <Eigen/Core>
#include <span>
#include <string>
#include <vector>

#include "hubbleflow/scan_frame.h"
#include "standardisation/standardisation.h"

namespace thirdrung {

/// The baseline with other magnitudes, redshifts or expansion: a correction switched off, a rerun of an earlier stage.
struct Variation {
  std::string scan;
  std::string setting;
  std::vector<FlowSupernova> supernovae;  ///< All of the frame's sample, in its order, with what has changed.
  FlowOptions flow;                       ///< For them; the frame's own if nothing changed there.
  /// Where the change is itself random from one supernova to the next (a colour correction left off adds the
  /// population's spread to every magnitude), its variance and its covariance with the baseline magnitude's error
  /// [mag^2]; empty for a fixed change.
  Eigen::VectorXd change_variance, change_covariance;
};

/// One row: a' = w . y' with the weights of the covariance as it stands, and members reselected by the new z_flow in
/// the baseline's range.
///
/// Delta = (w' - w) . y + w' . (y' - y), so its variance is (w' - w)^T C (w' - w) + sum w'_i^2 var(change_i) + 2 sum
/// (w'_i - w_i) w'_i cov(change_i, y_i).
ScanRow scan_variation(const ScanFrame& frame, const Variation& variation);

/// Takes the squared departure of each change from their mean over the baseline for its variance, as where a correction
/// differs from one supernova to the next in a way that no model gives (White 1980, Econometrica 48, 817). The change
/// is that of the variation's magnitudes and redshifts against the frame's.
void estimate_change_variance(const ScanFrame& frame, Variation& variation);

/// A correction of the standardisation.
enum class Correction { stretch, colour, host_mass };

/// The variation that leaves one correction off: magnitudes without alpha (s - 1), - beta c or gamma (P - 1/2), the
/// change's variance from the sample's own spread of that term, and the covariance with the magnitude's error from the
/// light-curve fit.
/// @param data in the order of the frame's sample, one a supernova (std::logic_error otherwise).
Variation without_correction(const ScanFrame& frame, std::span<const StandardisationDatum> data,
                             const StandardisationCoefficients& coefficients, const HostMassOptions& host_mass,
                             Correction which);

}  // namespace thirdrung
