#pragma once

#include "tables/table.h"
#include "training/run_training.h"

namespace thirdrung {

/// One row a training supernova: supernova, survey, z_helio, t_0 (d), m_b (mag), s, c (mag), epochs, fold,
/// chi2_per_dof.
Table training_set_table(const TrainingResult& result);
/// supernova, survey, reason.
Table left_out_table(const TrainingResult& result);
/// Smoothing strengths tried: kind, the six strengths, score, chosen.
Table cross_validation_table(const TrainingResult& result);
/// Zero-point offsets the data would prefer: survey, passband, offset (mag), offset_error (mag), supernovae.
Table offsets_table(const std::vector<ZeroPointOffset>& rows);
/// Factors on the measured errors that the data would prefer: survey, passband, error_factor, error_factor_error,
/// supernovae, epochs.
Table error_factors_table(const std::vector<ErrorFactor>& rows);

}  // namespace thirdrung
