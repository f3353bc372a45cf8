#pragma once

#include <functional>
#include <span>
#include <string>
#include <vector>

#include "training/trainer.h"

namespace thirdrung {

/// Zero-point shift that the light curves of one passband would prefer.
struct ZeroPointOffset {
  std::string survey;
  std::string passband;
  double offset = 0;  ///< To be added to the tabulated magnitudes [mag].
  double error = 0;   ///< 1σ, the others free [mag].
  int supernovae = 0;
};

/// Offsets of all passbands together, with every supernova's own unknowns eliminated and the template held.
///
/// A shift common to all passbands of a survey is taken up by m_B, and a trend with wavelength by c, so those
/// directions are not determined: the prior about zero decides there, of width `prior_width` [mag] by passband.
std::vector<ZeroPointOffset> zero_point_offsets(
    const SpectralTemplate& model, std::span<const TrainingSupernova> supernovae,
    std::span<const SupernovaUnknowns> unknowns, std::span<const Eigen::VectorXd> robust_weights,
    const UnknownsPrior& prior, const std::function<double(const std::string&)>& prior_width, int threads);

}  // namespace thirdrung
