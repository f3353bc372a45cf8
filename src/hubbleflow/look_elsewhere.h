#pragma once

#include <Eigen/Core>
#include <cstdint>
#include <span>
#include <vector>

namespace thirdrung {

struct ScanRow;

/// Probability that among normal deviates with this covariance (mean 0) the largest |x_k| / sigma_k is at least
/// `largest`, by seeded draws: the chance that a scan of correlated settings shows an extreme as big with nothing
/// behind it. Entries of zero variance take no part. 1 if there is none.
double probability_of_extreme(const Eigen::MatrixXd& covariance, double largest, std::size_t draws = 10000,
                              std::uint64_t seed = 1);

/// Writes into the caution of the most extreme row of a scan how often chance does as much over the whole scan. Scans
/// of a single setting, and extremes below 1.5 errors, get none.
/// @param covariance of the rows' delta_ab.
void add_look_elsewhere_caution(std::span<ScanRow> rows, const Eigen::MatrixXd& covariance);

}  // namespace thirdrung
