#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <set>

#include "base/error.h"
#include "base/text.h"
#include "simulation/simulation_options.h"

namespace thirdrung {

namespace {

/// Checks of one part of the options; every message names the part and the setting.
struct Part {
  std::string origin;
  std::string name;

  [[noreturn]] void fail(const std::string& setting, const std::string& fault, const std::string& remedy) const {
    throw InputError({origin, {}, setting}, fmt::format("{} of {} {}", setting, name, fault), remedy);
  }
  void between(const std::string& setting, double value, double low, double high) const {
    if (!(value >= low && value <= high)) {
      fail(setting, fmt::format("is {}", value), fmt::format("give a number from {} to {}", low, high));
    }
  }
  void increase(const std::string& low_name, double low, const std::string& high_name, double high) const {
    if (!(low < high)) {
      fail(low_name, fmt::format("is {}, not below {} = {}", low, high_name, high), "put the smaller first");
    }
  }
};

void check_relation(const SimulatedRelation& relation, const std::string& origin) {
  const Part part{origin, "[relation]"};
  part.between("h0", relation.h0, 10, 300);
  part.between("absolute_magnitude", relation.absolute_magnitude, -25, -10);
  part.between("sigma_int", relation.sigma_int, 0, 2);
}

void check_population(const SimulatedPopulation& population, const std::string& origin) {
  const Part part{origin, "[population]"};
  part.between("s_width_below", population.s_width_below, 0, 1);
  part.between("s_width_above", population.s_width_above, 0, 1);
  part.increase("s_min", population.s_min, "s_max", population.s_max);
  part.between("s_min", population.s_min, 0.4, 2);
  part.between("s_peak", population.s_peak, population.s_min, population.s_max);
  part.between("c_width", population.c_width, 0, 1);
  part.between("c_tail", population.c_tail, 0, 1);
  part.between("c_mean", population.c_mean, -1, 1);
  part.increase("c_mean", population.c_mean, "c_max", population.c_max);
  part.between("mass_width", population.mass_width, 0, 3);
  part.between("mass_mean", population.mass_mean, 6, 13);
  part.between("mass_error", population.mass_error, 0, 3);
  part.between("mass_missing", population.mass_missing, 0, 1);
}

void check_surroundings(const SimulationOptions& options) {
  const Part velocities{options.origin, "[velocities]"};
  velocities.between("sigma_v", options.velocities.sigma_v, 0, 3000);
  velocities.between("bulk_speed", options.velocities.bulk_speed, 0, 3000);
  const Part dust{options.origin, "[milky_way]"};
  dust.between("ebv_at_pole", options.milky_way.ebv_at_pole, 0, 1);
  dust.between("clumpiness", options.milky_way.clumpiness, 0, 3);
  dust.increase("ebv_at_pole", options.milky_way.ebv_at_pole, "ebv_max", options.milky_way.ebv_max);
  dust.between("table_error", options.milky_way.table_error, 0, 1);
}

std::vector<std::string> check_passbands(const SimulationOptions& options) {
  std::vector<std::string> ids;
  for (const SimulatedPassband& passband : options.passbands) {
    const Part part{options.origin, fmt::format("passband \"{}\"", passband.id)};
    if (passband.id.empty() || passband.id.find('/') != std::string::npos) {
      part.fail("id", "is no name of a file", "give one without /");
    }
    for (const std::string& before : ids) {
      if (before == passband.id) part.fail("id", "is given twice", "leave one of them out");
    }
    part.between("centre", passband.centre, 1500, 30000);
    part.between("width", passband.width, 10, passband.centre);
    part.between("edge", passband.edge, 1, passband.width);
    part.between("zero_point_error", passband.zero_point_error, 0, 1);
    part.between("wavelength_error", passband.wavelength_error, 0, 500);
    part.between("zero_point_shift", passband.zero_point_shift, -5, 5);
    part.between("wavelength_shift", passband.wavelength_shift, -500, 500);
    ids.push_back(passband.id);
  }
  return ids;
}

void check_bands(const SimulatedSurvey& survey, const Part& part, const std::vector<std::string>& ids) {
  if (survey.bands.empty()) part.fail("passbands", "is empty", "name those that it observes in");
  std::set<std::string> seen;
  for (const SurveyBand& band : survey.bands) {
    if (!seen.insert(band.passband).second) {
      part.fail("passbands", fmt::format("names {} twice", band.passband), "name it once");
    }
    if (std::find(ids.begin(), ids.end(), band.passband) == ids.end()) {
      const std::string near = nearest_word(band.passband, ids);
      part.fail("passbands", fmt::format("names the unknown {}", band.passband),
                near.empty() ? "define it as a [[passband]]" : fmt::format("did you mean \"{}\"?", near));
    }
    part.between("depth", band.depth, 5, 35);
  }
}

void check_survey(const SimulatedSurvey& survey, const Part& part) {
  if (survey.name.empty() || survey.name.find('/') != std::string::npos) {
    part.fail("name", "is no name of a file", "give one without /");
  }
  part.increase("z_min", survey.z_min, "z_max", survey.z_max);
  part.between("z_min", survey.z_min, 0.003, 1);
  part.between("z_max", survey.z_max, 0.003, 1);
  part.between("z_error", survey.z_error, 0, 0.01);
  part.increase("dec_min", survey.footprint.dec_min, "dec_max", survey.footprint.dec_max);
  part.increase("ra_min", survey.footprint.ra_min, "ra_max", survey.footprint.ra_max);
  part.between("galactic_latitude_min", survey.footprint.galactic_latitude_min, 0, 85);
  part.between("first_mjd", survey.first_mjd, 0, 200000);
  part.between("seasons", survey.seasons, 1, 1000);
  part.between("season_length", survey.season_length, 20, 366);
  part.between("cadence", survey.cadence, 0.1, 100);
  part.between("cadence_scatter", survey.cadence_scatter, 0, survey.cadence);
  part.between("lost", survey.lost, 0, 0.95);
  part.increase("first_phase", survey.first_phase, "last_phase", survey.last_phase);
  part.between("first_phase_scatter", survey.first_phase_scatter, 0, 50);
  part.between("depth_scatter", survey.depth_scatter, 0, 3);
  part.between("noise_floor", survey.noise_floor, 0, 1);
  part.between("detections", survey.detections, 0, 1000);
  part.between("peak_limit_width", survey.peak_limit_width, 0, 5);
}

void check_calibrators(const SimulationOptions& options) {
  const SimulatedCalibrators& calibrators = options.calibrators;
  const Part part{options.origin, "[calibrators]"};
  part.between("supernovae", static_cast<double>(calibrators.supernovae), 0, 1000);
  part.between("shared_hosts", static_cast<double>(calibrators.shared_hosts), 0,
               std::floor(0.5 * static_cast<double>(calibrators.supernovae)));
  part.increase("z_min", calibrators.z_min, "z_max", calibrators.z_max);
  part.between("z_min", calibrators.z_min, 0.002, 0.1);
  part.between("modulus_error", calibrators.modulus_error, 0.001, 1);
  part.between("common_error", calibrators.common_error, 0, 1);
  std::vector<std::string> names;
  for (const SimulatedSurvey& survey : options.surveys) {
    names.push_back(survey.name);
    const std::string& prefix = survey.prefix.empty() ? survey.name : survey.prefix;
    if (calibrators.supernovae > 0 && prefix == calibrators.prefix)
      part.fail("prefix", fmt::format("is that of survey \"{}\"", survey.name), "give another");
  }
  for (const std::string& name : calibrators.surveys) {
    if (std::find(names.begin(), names.end(), name) != names.end()) continue;
    const std::string near = nearest_word(name, names);
    part.fail("surveys", fmt::format("names the unknown {}", name),
              near.empty() ? "name surveys of this file" : fmt::format("did you mean \"{}\"?", near));
  }
}

}  // namespace

void check_simulation(const SimulationOptions& options) {
  check_relation(options.relation, options.origin);
  check_population(options.population, options.origin);
  check_surroundings(options);
  const std::vector<std::string> ids = check_passbands(options);
  if (options.surveys.empty()) {
    throw InputError({options.origin, {}, "survey"}, "there is no survey", "give at least one [[survey]]");
  }
  for (std::size_t k = 0; k < options.surveys.size(); ++k) {
    const SimulatedSurvey& survey = options.surveys[k];
    const Part part{options.origin, fmt::format("survey \"{}\"", survey.name)};
    check_survey(survey, part);
    check_bands(survey, part, ids);
    bool known = survey.shared == 0;
    for (std::size_t before = 0; before < k; ++before) {
      const SimulatedSurvey& other = options.surveys[before];
      if (other.name == survey.name) part.fail("name", "is given twice", "rename one of them");
      if (other.name != survey.shared_with) continue;
      known = true;
      part.between("shared", static_cast<double>(survey.shared), 0, static_cast<double>(other.supernovae));
    }
    if (!known) part.fail("shared_with", "names no earlier survey", "name one that stands before it");
  }
  check_calibrators(options);
}

}  // namespace thirdrung
