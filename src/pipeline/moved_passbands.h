#pragma once

#include <algorithm>
#include <string>
#include <vector>

#include "pipeline/varied_inputs.h"

namespace thirdrung {

inline bool holds(const std::vector<std::string>& list, const std::string& word) {
  return std::find(list.begin(), list.end(), word) != list.end();
}

/// Whether a systematic touches a light curve, or a supernova, of this survey.
template <typename Observed>
bool in_scope(const SystematicInput& input, const Observed& one) {
  return input.surveys.empty() || holds(input.surveys, one.survey);
}

/// moved_inputs() of a zero point or a wavelength: one for each passband in scope, or one for all together.
std::vector<MovedInput> moved_passbands(const SystematicInput& input, const RunInputs& inputs);

}  // namespace thirdrung
