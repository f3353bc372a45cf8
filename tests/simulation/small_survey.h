#pragma once

#include "simulation/simulation_options.h"

namespace thirdrung::testing {

/// One invented survey in four bands, 0.02 < z < 0.08.
inline SimulationOptions small_survey(std::size_t supernovae, std::uint64_t seed) {
  SimulationOptions out;
  out.seed = seed;
  out.passbands = {{.id = "lark-b", .centre = 4450, .width = 1100},
                   {.id = "lark-g", .centre = 5400, .width = 900},
                   {.id = "lark-r", .centre = 6500, .width = 1200},
                   {.id = "lark-i", .centre = 7700, .width = 1000}};
  SimulatedSurvey survey;
  survey.name = std::string("lark");
  survey.prefix = std::string("L");
  survey.supernovae = supernovae;
  survey.z_min = 0.02;
  survey.z_max = 0.08;
  for (const SimulatedPassband& passband : out.passbands) survey.bands.push_back({passband.id, 21.0});
  out.surveys.push_back(survey);
  return out;
}

}  // namespace thirdrung::testing
