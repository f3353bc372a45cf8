#include <algorithm>
#include <set>

#include "pipeline/varied_inputs.h"
#include "tables/read_write.h"

namespace thirdrung {

namespace {

/// Whether each light curve came from magnitudes: its flux moves with the zero of its passbands.
std::vector<bool> tabulated_as_magnitudes(const RunFile& run) {
  std::vector<bool> out;
  for (const SurveyInput& survey : run.surveys) {
    std::filesystem::path table = survey.photometry.path;
    if (std::filesystem::is_directory(table)) {
      std::set<std::filesystem::path> files;
      for (const auto& entry : std::filesystem::directory_iterator(table)) {
        if (entry.is_regular_file()) files.insert(entry.path());
      }
      if (!files.empty()) table = *files.begin();
    }
    out.push_back(!read_table(table).has("flux"));
  }
  return out;
}

}  // namespace

RunInputs read_run_inputs(const RunFile& run, const std::vector<std::string>& supernovae) {
  RunInputs out{read_catalogue(run),       read_run_template(run), read_all_supernovae(run).supernovae, {}, {}, {},
                read_redshift_options(run)};
  if (run.standard_star.given()) out.standard_star = read_spectrum(read_table(run.standard_star.path));
  const std::set<std::string> wanted(supernovae.begin(), supernovae.end());
  const std::vector<bool> magnitudes = tabulated_as_magnitudes(run);
  for (LightCurve& one : read_all_photometry(run, out.catalogue).light_curves) {
    if (!wanted.contains(one.supernova)) continue;
    const auto survey = std::find_if(run.surveys.begin(), run.surveys.end(),
                                     [&](const SurveyInput& s) { return s.name == one.survey; });
    out.from_magnitudes.push_back(magnitudes[static_cast<std::size_t>(survey - run.surveys.begin())]);
    out.light_curves.push_back(std::move(one));
  }
  return out;
}

}  // namespace thirdrung
