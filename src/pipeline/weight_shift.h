#pragma once

#include <Eigen/Core>
#include <vector>

#include "hubbleflow/covariance_model.h"
#include "pipeline/run_file.h"
#include "pipeline/standardisation_stage.h"

namespace thirdrung {

/// A standardised sample with the settings it was made with.
struct StandardisedRun {
  const RunFile& run;
  const Magnitudes& magnitudes;
};

/// What has to be added to every magnitude alike, so that `shift` moves a_B as the whole rerun does [mag].
///
/// An input like sigma_v moves the covariance, and a_B by its new weights even where no magnitude moves. With a_0, w_0
/// the baseline's intercept and weights and a_1 the intercept of the rerun, from its own magnitudes, sigma_int and
/// covariance, this is -5 (a_1 - a_0) - w_0 . shift. A shift common to all does not change the weights of an intercept;
/// differences between subsets do not hold it.
/// @param shift of the magnitudes that the rerun has found, in their order [mag].
/// @param used which supernovae a_B is from.
/// @param others the other systematics, which count in the weights.
double common_shift_of_weights(const StandardisedRun& baseline, const StandardisedRun& moved,
                               const Eigen::VectorXd& shift, const std::vector<bool>& used,
                               const std::vector<SystematicShift>& others);

}  // namespace thirdrung
