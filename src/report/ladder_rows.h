#pragma once

#include <string>
#include <utility>
#include <vector>

#include "report/run_tables.h"

namespace thirdrung {

/// One calibrator, as the table "calibrators" has it.
struct CalibratorRow {
  std::string supernova, host, why_not;
  double modulus = 0, modulus_error = 0;
  double absolute = 0, absolute_error = 0;  ///< M_B that it alone gives [mag]; NaN where it is not used.
  double residual = 0;                      ///< [mag].
  bool used = false;
};

/// What a run with calibrators says of its ladder.
struct LadderRows {
  std::vector<CalibratorRow> calibrators;
  Measured m_b;                                        ///< [mag].
  std::vector<std::pair<std::string, double>> shares;  ///< Of the variance of log H0, in words; they add up to 1.
};

/// Whether the run joined by calibrators.
bool has_ladder(const RunTables& run);
/// Only where it did.
LadderRows ladder_rows(const RunTables& run);

}  // namespace thirdrung
