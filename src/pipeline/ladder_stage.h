#pragma once

#include "ladder/solve_ladder.h"
#include "pipeline/covariance_stage.h"
#include "pipeline/run_file.h"
#include "pipeline/standardisation_stage.h"
#include "pipeline/systematics_stage.h"
#include "standardisation/standardisation.h"
#include "tables/table.h"

namespace thirdrung {

/// What the join of calibrators and Hubble flow works on, as the stages before it left it.
struct LadderInput {
  Table sample;
  Table set_aside;        ///< Without rows if there is none.
  Magnitudes magnitudes;  ///< Of the Hubble flow.
  StandardisationCoefficients coefficients;
  CoefficientCovariance coefficient_covariance;
  SystematicShifts shifts;        ///< Of Hubble flow and calibrators; empty without systematics.
  double hidden_magnitude = 0.0;  ///< Added to the calibrators' magnitudes in a blind run [mag].
};

/// What it leaves.
struct LadderResult {
  Table join;         ///< quantity, value, error, unit: h0, M_B, their correlation, shares of the error.
  Table calibrators;  ///< One row a calibrator: magnitude, distance, residual, whether used and why not.
  LadderBlock block;
  LadderSolution solution;
};

/// H0 and M_B from the calibrators of the run and its Hubble flow, in one least-squares system (solve_ladder.h).
///
/// Calibrators must pass the quality rules, but for the redshift range. They are standardised with the coefficients of
/// the Hubble flow, whose errors shift both sides together, as the systematics do.
/// Throws NoResultError if no calibrator is left, InputError as read_calibrators().
LadderResult join_calibrators(const RunFile& run, const LadderInput& input);

}  // namespace thirdrung
