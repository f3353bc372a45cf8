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

/// Every numeric rule in force, once tighter and once looser, the others as they are. Redshift limits have scans of
/// their own, and host-mass limits are choices of a sample; both are left out.
std::vector<CutVariation> cut_variations(const CutLimits& limits);

}  // namespace thirdrung
