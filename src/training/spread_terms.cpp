#include "training/spread_terms.h"

#include "base/constants.h"

namespace thirdrung {

void add_spread_slope(const CoefficientLayout& layout, const TrainingSupernova& sn, const LinearisedSupernova& line,
                      const Eigen::Matrix4d& covariance, Eigen::VectorXd& into) {
  // d ½ tr(L^T C^-1 L Σ) = tr(W^T dL) with W = C^-1 L Σ, and dL in s and c is a flux-weighted mean of dΓ and dK.
  const Eigen::MatrixXd weighted =
      apply_inverse(sn, line.noise, line.model.flux, line.model.by_unknowns) * covariance.rightCols<2>();
  for (const TrainingBand& band : sn.bands) {
    for (std::size_t e = band.begin; e < band.end; ++e) {
      const EpochGradient& g = line.gradients[e];
      const auto row = static_cast<Eigen::Index>(e);
      for (int i = 0; i < 4; ++i) {
        into.segment(layout.gamma(g.gamma_phase.first + i, band.gamma_first), band.gamma_count) +=
            weighted(row, 0) * g.gamma_phase.value[static_cast<std::size_t>(i)] * g.gamma_share;
      }
      into.segment(layout.colour(band.colour_first), band.colour_count) +=
          -constants::ln_flux_per_mag * weighted(row, 1) * g.colour_share;
    }
  }
}

}  // namespace thirdrung
