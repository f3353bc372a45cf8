#pragma once

#include <Eigen/Core>
#include <vector>

#include "lightcurve/noise.h"
#include "lightcurve/scan.h"

namespace thirdrung {

/// What every solution of one supernova shares.
struct Problem {
  const ObservedBands& observed;
  const SpectralTemplate& model;
  const FitOptions& options;
  Window window;
};

/// Where minimising r^T C^−1 r has led from one start.
struct Solution {
  Parameters at = Parameters::Zero();
  Eigen::Matrix4d covariance = Eigen::Matrix4d::Zero();
  Selection selection;
  Eigen::VectorXd flux;          ///< Model flux of the selected observations [uJy].
  FluxSlopes slopes;             ///< Its derivatives in the parameters.
  std::vector<double> weights;   ///< Of the robust loss; empty without it.
  double chi2 = 0;               ///< Of the data, without priors; of epochs in good standing, each in full.
  std::size_t counted = 0;       ///< Epochs in chi2.
  std::optional<Prior> s_prior;  ///< As applied.
  std::optional<Prior> c_prior;
  int bands = 0;  ///< Bands with a selected observation.
  int iterations = 0;
  bool converged = false;
};

/// Solves with the given selection held. C is rebuilt until no parameter moves by 1e-4 of its error; each solution at
/// fixed C is a Levenberg-Marquardt minimisation (Ceres' TinySolver) with analytic derivatives. Bounds of t_0, s and c
/// are kept by the variable y with x = middle + half-width × sin y (James & Roos 1975, Comput. Phys. Commun. 10, 343).
Solution solve(const Problem& problem, const Parameters& start, Selection selection);

/// −2 ln L of the parameters on any selection, but for a constant: r^T C^−1 r + ln |C|.
double minus_two_log_likelihood(const Problem& problem, const Solution& solution, const Selection& selection);

}  // namespace thirdrung
