#pragma once

#include <string>
#include <vector>

#include "hubbleflow/covariance_model.h"

namespace thirdrung {

/// Shifts named `stem` and a number, of which there may be hundreds, in their principal directions: the sum of their
/// outer products stays the same but for a part in 1e4 of its trace.
void condense(std::vector<SystematicShift>& shifts, const std::string& stem);

/// "zero point g", "zero point g (2)" where a name occurs again.
void make_names_unique(std::vector<SystematicShift>& shifts);

}  // namespace thirdrung
