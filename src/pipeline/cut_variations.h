#pragma once

#include <string>
#include <vector>

#include "sample/quality_cuts.h"

namespace thirdrung {

/// A rule with another limit.
struct CutVariation {
  std::string setting;  ///< "|c| < 0.2 (tighter)".
  CutLimits limits;
};

/// Every numeric rule in force, once tighter and once looser, the others as they are; and that on known host masses
/// turned round. Redshift limits have scans of their own.
std::vector<CutVariation> cut_variations(const CutLimits& limits);

}  // namespace thirdrung
