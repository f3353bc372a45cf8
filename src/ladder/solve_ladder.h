#pragma once

#include "ladder/ladder_block.h"

namespace thirdrung {

/// Where the variance of 5 log10 H0 comes from; the four add up to 1. A correlation can make one of them negative.
struct LadderShares {
  double calibrators = 0.0;   ///< Distances of the hosts, light curves and intrinsic scatter of the calibrators.
  double hubble_flow = 0.0;   ///< Light curves, intrinsic scatter and velocities of the Hubble flow.
  double coefficients = 0.0;  ///< alpha, beta and gamma, which both share.
  double systematics = 0.0;   ///< All of them, on both, together.
  double distances = 0.0;     ///< The part of `calibrators` that is the distances of the hosts; not a fifth share.
};

/// A ladder solved.
struct LadderSolution {
  Eigen::VectorXd theta;       ///< In the order of the block's parameters.
  Eigen::MatrixXd covariance;  ///< Of theta.
  Eigen::MatrixXd weights;     ///< theta = weights y.
  Eigen::VectorXd residuals;   ///< y - L theta [mag].
  double chi2 = 0.0;
  int dof = 0;
  double probability = 1.0;  ///< Of a chi-square at least as large.

  double m_b = 0.0, m_b_error = 0.0;                      ///< M_B of a supernova of s = 1, c = 0, mid host step [mag].
  double five_log10_h0 = 0.0, five_log10_h0_error = 0.0;  ///< [mag].
  double correlation = 0.0;                               ///< Of these two.
  double h0 = 0.0, h0_error = 0.0;                        ///< [km/s/Mpc].
  LadderShares shares;
};

/// Generalised least squares (Aitken 1936, Proc. R. Soc. Edinburgh 55, 42): theta = A y, A = (L^T W^-1 L)^-1 L^T W^-1,
/// with W the uncertainty's weighting(), and covariance A C A^T, with C its total(). W leaves out the errors of alpha,
/// beta and gamma (see CovarianceModel::weighting).
/// Throws InputError if W is not positive definite.
LadderSolution solve_ladder(const LadderBlock& block);

/// Writes the block and its solution; docs/ladder-block.md describes the file.
/// @param blind the magnitudes carry hidden constants.
void write_ladder_block(const LadderBlock& block, const LadderSolution& solution, bool blind,
                        const std::filesystem::path& path);

}  // namespace thirdrung
