#pragma once

#include <cstdint>

#include "hubbleflow/scan_frame.h"

namespace thirdrung {

/// Jackknife over the baseline's supernovae from the exact leave-one-out: a_b = baseline minus the bias estimate (n -
/// 1)(mean of a without one
/// - a), a_b_error = sqrt((n - 1)/n sum (a_i - mean)^2) (Efron 1982, The Jackknife, the Bootstrap and Other Resampling
/// Plans).
///
/// It sees only what differs from one supernova to the next: errors common to all are not in it, and the row says so.
ScanRow jackknife_row(const ScanFrame& frame);

/// Bootstrap over the baseline's supernovae with their baseline weights: a* = sum m_i w_i y_i / sum m_i w_i, m_i how
/// often i was drawn (Efron 1979, Ann. Stat. 7, 1). a_b is the mean of the draws, a_b_error their spread. Same
/// limitation.
ScanRow bootstrap_row(const ScanFrame& frame, std::size_t draws, std::uint64_t seed);

}  // namespace thirdrung
