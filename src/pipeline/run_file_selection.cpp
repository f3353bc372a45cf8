// The section of the run file for magnitude limits.
#include <fmt/format.h>

#include <algorithm>

#include "base/text.h"
#include "pipeline/run_file_sections.h"

namespace thirdrung {

void refuse_unknown_surveys(const std::vector<std::string>& surveys, const RunSection& section, const RunFile& run) {
  std::vector<std::string> names;
  for (const SurveyInput& known : run.surveys) names.push_back(known.name);
  for (const std::string& survey : surveys) {
    if (std::find(names.begin(), names.end(), survey) != names.end()) continue;
    const std::string near = nearest_word(survey, names);
    throw InputError(section.place("surveys"), fmt::format("there is no survey {}", survey),
                     near.empty() ? "name one of the run" : fmt::format("did you mean {}?", near));
  }
}

void read_selection_section(RunSection section, RunFile& run) {
  std::vector<std::string> surveys = section.texts("surveys");
  refuse_unknown_surveys(surveys, section, run);
  if (!section.has("magnitude_limit")) {
    throw InputError(section.place("magnitude_limit"), "[[selection]] lacks the key magnitude_limit",
                     "give the peak B magnitude at which half of the supernovae are found");
  }
  const MagnitudeLimit limit{section.number_between("magnitude_limit", 0.0, 5.0, 30.0),
                             section.number_between("width", 0.2, 0.0, 5.0)};
  section.done();
  if (surveys.empty()) {
    for (const SurveyInput& survey : run.surveys) surveys.push_back(survey.name);
  }
  for (const std::string& survey : surveys) {
    if (run.magnitude_limits.emplace(survey, limit).second) continue;
    throw InputError(section.place("surveys"), fmt::format("two [[selection]] state a limit of survey {}", survey),
                     "keep one of them");
  }
}

}  // namespace thirdrung
