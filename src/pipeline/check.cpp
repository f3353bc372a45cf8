#include "pipeline/check.h"

#include <fmt/format.h>
#include <unistd.h>

#include <map>
#include <set>

#include "base/error.h"
#include "pipeline/calibrators.h"
#include "pipeline/inputs.h"
#include "template/template_file.h"

namespace thirdrung {

namespace fs = std::filesystem;

namespace {

/// The nearest folder above the output that exists must be writable.
void check_output(const fs::path& output) {
  fs::path there = fs::absolute(output);
  std::error_code ignored;
  while (!fs::exists(there, ignored) && there.has_parent_path() && there != there.parent_path())
    there = there.parent_path();
  if (!fs::is_directory(there, ignored) || ::access(there.c_str(), W_OK | X_OK) != 0)
    throw OutputError(fmt::format("{}: the output folder cannot be written.", output.string()));
}

struct SurveyCount {
  std::size_t listed = 0, light_curves = 0, epochs = 0, without_photometry = 0, set_aside = 0;
  double z_low = 1e9, z_high = -1;
  std::set<std::string> passbands;
};

std::map<std::string, SurveyCount> counted(const SurveySupernovae& supernovae, const Photometry& photometry) {
  std::map<std::string, SurveyCount> out;
  std::set<std::pair<std::string, std::string>> seen;
  for (const LightCurve& one : photometry.light_curves) {
    SurveyCount& count = out[one.survey];
    ++count.light_curves;
    count.epochs += one.epochs.size();
    count.passbands.insert(one.passbands.begin(), one.passbands.end());
    seen.insert({one.survey, one.supernova});
  }
  for (const Supernova& one : supernovae.supernovae) {
    SurveyCount& count = out[one.survey];
    ++count.listed;
    count.z_low = std::min(count.z_low, one.z_helio);
    count.z_high = std::max(count.z_high, one.z_helio);
    if (!seen.contains({one.survey, one.name})) ++count.without_photometry;
  }
  for (const SetAside& one : supernovae.set_aside) ++out[one.survey].set_aside;
  for (const SetAside& one : photometry.set_aside) ++out[one.survey].set_aside;
  return out;
}

void add_set_aside(const std::vector<SetAside>& list, std::vector<std::string>& remarks) {
  constexpr std::size_t most = 10;
  for (std::size_t i = 0; i < list.size() && i < most; ++i)
    remarks.push_back(fmt::format("{} ({}) will be set aside: {}", list[i].supernova, list[i].survey, list[i].reason));
  if (list.size() > most) remarks.push_back(fmt::format("and {} more will be set aside.", list.size() - most));
}

void add_uncovered(const SpectralTemplate& model, const PassbandCatalogue& catalogue,
                   const std::map<std::string, SurveyCount>& surveys, std::vector<std::string>& remarks) {
  for (const auto& [name, count] : surveys) {
    if (count.z_high < 0) continue;
    std::string list;
    for (const std::string& id : count.passbands) {
      const double wavelength = catalogue.at(id).passband.mean_wavelength();
      if (wavelength / (1 + count.z_low) > model.wavelength_max ||
          wavelength / (1 + count.z_high) < model.wavelength_min)
        list += (list.empty() ? "" : ", ") + id;
    }
    if (!list.empty())
      remarks.push_back(
          fmt::format("{}: {} lie outside the template's {:.0f} to {:.0f} Angstrom for some redshifts and are "
                      "not fitted there.",
                      name, list, model.wavelength_min, model.wavelength_max));
  }
}

/// Calibrators and their distances, and what their light curves are.
void check_join(const RunFile& run, const SurveySupernovae& supernovae, const Photometry& photometry,
                CheckResult& result) {
  if (!run.join.calibrators.given()) return;
  const CalibratorList list = read_run_calibrators(run);
  check_calibrators(run, list, supernovae, read_redshift_options(run));
  const Eigen::VectorXd& modulus = list.distances.modulus;
  result.found.push_back(fmt::format("calibrators {}: {} supernovae in {} hosts, distance moduli {:.2f} to {:.2f}",
                                     run.join.calibrators.written, list.calibrators.size(), list.distances.hosts.size(),
                                     modulus.minCoeff(), modulus.maxCoeff()));
  std::set<std::string> observed;
  for (const LightCurve& one : photometry.light_curves) observed.insert(one.supernova);
  for (const Calibrator& one : list.calibrators) {
    if (!observed.contains(one.supernova))
      result.remarks.push_back(fmt::format("The calibrator {} has no usable photometry.", one.supernova));
  }
  if (list.calibrators.size() < few_calibrators)
    result.remarks.push_back(fmt::format("There are only {} calibrators.", list.calibrators.size()));
}

}  // namespace

void check_systematics(const RunFile& run, const PassbandCatalogue& catalogue) {
  for (const SystematicInput& one : run.systematics) {
    for (const std::string& id : one.passbands) {
      Place place = one.place;
      place.column = "passbands";
      catalogue.at(id, place);
    }
    if (one.file.given()) require_exists(one.file);
  }
}

CheckResult check_run(const RunFile& run) {
  CheckResult result;
  const TrainedTemplate trained = read_run_template(run);
  const TemplateDescription description = describe(trained);
  result.found.push_back(fmt::format("template    {} ({}, {:.0f} to {:.0f} Angstrom, phases {:.0f} to {:.0f} d)",
                                     run.template_file.written, description.name, description.wavelength_min,
                                     description.wavelength_max, description.phase_min, description.phase_max));
  const PassbandCatalogue catalogue = read_catalogue(run);
  result.found.push_back(
      fmt::format("passbands   {} ({} curves)", run.passband_catalogue.written, catalogue.ids().size()));
  check_systematics(run, catalogue);
  const SurveySupernovae supernovae = read_all_supernovae(run);
  const Photometry photometry = read_all_photometry(run, catalogue);
  read_redshift_options(run);
  const auto surveys = counted(supernovae, photometry);
  for (const SurveyInput& survey : run.surveys) {
    const SurveyCount& count = surveys.at(survey.name);
    result.found.push_back(fmt::format(
        "survey      {}: {} supernovae at z {:.4f} to {:.4f}, {} light curves, {} epochs in {} passbands", survey.name,
        count.listed, count.z_low, count.z_high, count.light_curves, count.epochs, count.passbands.size()));
    if (count.without_photometry > 0)
      result.remarks.push_back(
          fmt::format("{}: {} supernovae have no photometry.", survey.name, count.without_photometry));
  }
  check_join(run, supernovae, photometry, result);
  add_set_aside(supernovae.set_aside, result.remarks);
  add_set_aside(photometry.set_aside, result.remarks);
  add_uncovered(trained.model, catalogue, surveys, result.remarks);
  check_output(run.output);
  result.found.push_back(fmt::format("output      {}", run.output.string()));
  if (run.blind)
    result.remarks.emplace_back(run.join.calibrators.given()
                                    ? "The run is blind: a_B, M_B and H0 carry hidden constants until it is unblinded."
                                    : "The run is blind: a_B and H0 carry a hidden offset until it is unblinded.");
  return result;
}

}  // namespace thirdrung
