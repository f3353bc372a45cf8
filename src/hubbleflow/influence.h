#pragma once

#include <cstddef>
#include <string>
#include <vector>

#include "hubbleflow/scan_frame.h"

namespace thirdrung {

/// What one supernova of the baseline does to a_B.
struct InfluenceRow {
  std::string supernova;
  double delta_ab = 0.0;        ///< a_B without it minus a_B with it.
  double delta_ab_error = 0.0;  ///< Expected size of that.
  double weight = 0.0;          ///< In a_B.
  /// Its residual from what all others, correlations included, predict for it, over that prediction's error.
  double predicted_pull = 0.0;
};

/// Exact leave-one-out for every supernova, without refitting.
///
/// With P the precision, A the design and Q = P - P A (A^T P A)^-1 A^T P: leaving out i is the same as freeing its own
/// offset, whose estimate is (Q y)_i / Q_ii, so that theta changes by -(A^T P A)^-1 A^T P e_i (Q y)_i / Q_ii, with
/// variance
/// [(A^T P A)^-1 A^T P e_i]^2 / Q_ii (Cook & Weisberg 1982, Residuals and Influence in Regression, here for correlated
/// noise).
std::vector<InfluenceRow> influence(const ScanFrame& frame);

/// How often the largest of `count` independent normal pulls is at least this by chance: 1 - erf(pull / sqrt 2)^count.
double chance_of_largest_pull(double pull, std::size_t count);

}  // namespace thirdrung
