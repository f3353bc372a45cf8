#include "pipeline/simulation_file.h"

#include <fmt/format.h>
#include <toml++/toml.h>

#include "base/error.h"
#include "base/text.h"
#include "pipeline/run_section.h"

namespace thirdrung {

namespace {

double required(RunSection& section, const std::string& key) {
  const auto value = section.optional_number(key);
  if (!value) throw InputError(section.place(key), fmt::format("{} lacks the key {}", section.name(), key), "give it");
  return *value;
}

SimulatedRelation read_relation(RunSection section) {
  SimulatedRelation out;
  section.read_number("h0", out.h0);
  section.read_number("absolute_magnitude", out.absolute_magnitude);
  section.read_number("q0", out.expansion.q0);
  section.read_number("j0", out.expansion.j0);
  section.read_number("alpha", out.alpha);
  section.read_number("beta", out.beta);
  section.read_number("gamma", out.gamma);
  section.read_number("mass_step", out.mass_step);
  section.read_number("sigma_int", out.sigma_int);
  section.done();
  return out;
}

SimulatedPopulation read_population(RunSection section) {
  SimulatedPopulation out;
  section.read_number("s_peak", out.s_peak);
  section.read_number("s_width_below", out.s_width_below);
  section.read_number("s_width_above", out.s_width_above);
  section.read_number("s_min", out.s_min);
  section.read_number("s_max", out.s_max);
  section.read_number("c_mean", out.c_mean);
  section.read_number("c_width", out.c_width);
  section.read_number("c_tail", out.c_tail);
  section.read_number("c_max", out.c_max);
  section.read_number("mass_mean", out.mass_mean);
  section.read_number("mass_width", out.mass_width);
  section.read_number("mass_error", out.mass_error);
  section.read_number("mass_missing", out.mass_missing);
  section.done();
  return out;
}

SimulatedVelocities read_velocities(RunSection section) {
  SimulatedVelocities out;
  section.read_number("sigma_v", out.sigma_v);
  section.read_number("bulk_speed", out.bulk_speed);
  section.read_number("bulk_l", out.bulk_direction.l);
  section.read_number("bulk_b", out.bulk_direction.b);
  out.bulk_tabulated = section.flag("bulk_tabulated", out.bulk_tabulated);
  section.done();
  return out;
}

SimulatedMilkyWay read_milky_way(RunSection section) {
  SimulatedMilkyWay out;
  out.law = dust_law_from_name(section.text("law", name_of(out.law)), section.place("law"));
  section.read_number("r_v", out.r_v);
  section.read_number("ebv_at_pole", out.ebv_at_pole);
  section.read_number("clumpiness", out.clumpiness);
  section.read_number("ebv_max", out.ebv_max);
  section.read_number("table_error", out.table_error);
  section.done();
  return out;
}

SimulatedPassband read_passband(RunSection section) {
  SimulatedPassband out;
  out.id = section.text("id");
  out.centre = required(section, "centre");
  out.width = required(section, "width");
  section.read_number("edge", out.edge);
  section.read_number("zero_point_error", out.zero_point_error);
  section.read_number("wavelength_error", out.wavelength_error);
  section.read_number("zero_point_shift", out.zero_point_shift);
  section.read_number("wavelength_shift", out.wavelength_shift);
  section.done();
  return out;
}

std::vector<SurveyBand> read_bands(RunSection& section) {
  const std::vector<std::string> passbands = section.texts("passbands");
  const std::vector<double> depth = section.numbers("depth");
  if (depth.size() != passbands.size()) {
    throw InputError(section.place("depth"), fmt::format("{} passbands and {} depths", passbands.size(), depth.size()),
                     "give one depth for each passband, in the same order");
  }
  std::vector<SurveyBand> out;
  for (std::size_t i = 0; i < passbands.size(); ++i) out.push_back({passbands[i], depth[i]});
  return out;
}

void read_schedule(RunSection& section, SimulatedSurvey& out) {
  section.read_number("first_mjd", out.first_mjd);
  out.seasons = static_cast<int>(std::min<std::int64_t>(section.integer("seasons", out.seasons, 1), 1000));
  section.read_number("season_length", out.season_length);
  section.read_number("cadence", out.cadence);
  section.read_number("cadence_scatter", out.cadence_scatter);
  section.read_number("lost", out.lost);
  section.read_number("first_phase", out.first_phase);
  section.read_number("first_phase_scatter", out.first_phase_scatter);
  section.read_number("last_phase", out.last_phase);
  section.read_number("depth_scatter", out.depth_scatter);
  section.read_number("noise_floor", out.noise_floor);
  out.magnitudes = section.flag("magnitudes", out.magnitudes);
}

void read_selection(RunSection& section, SimulatedSurvey& out) {
  out.detections = static_cast<int>(std::min<std::int64_t>(section.integer("detections", out.detections, 0), 1000));
  section.read_number("detection_snr", out.detection_snr);
  section.read_number("peak_limit", out.peak_limit);
  section.read_number("peak_limit_width", out.peak_limit_width);
  out.shared_with = section.text("shared_with", out.shared_with);
  out.shared = static_cast<std::size_t>(section.integer("shared", 0, 0));
}

SimulatedSurvey read_survey(RunSection section) {
  SimulatedSurvey out;
  out.name = section.text("name");
  out.prefix = section.text("prefix", out.prefix);
  out.supernovae = static_cast<std::size_t>(section.integer("supernovae", 100, 0));
  section.read_number("z_min", out.z_min);
  section.read_number("z_max", out.z_max);
  section.read_number("z_error", out.z_error);
  section.read_number("dec_min", out.footprint.dec_min);
  section.read_number("dec_max", out.footprint.dec_max);
  section.read_number("ra_min", out.footprint.ra_min);
  section.read_number("ra_max", out.footprint.ra_max);
  section.read_number("galactic_latitude_min", out.footprint.galactic_latitude_min);
  out.bands = read_bands(section);
  read_schedule(section, out);
  read_selection(section, out);
  section.done();
  return out;
}

SimulatedCalibrators read_calibrators(RunSection section) {
  SimulatedCalibrators out;
  out.supernovae = static_cast<std::size_t>(section.integer("supernovae", 0, 0));
  out.shared_hosts = static_cast<std::size_t>(section.integer("shared_hosts", 0, 0));
  out.surveys = section.texts("surveys");
  section.read_number("z_min", out.z_min);
  section.read_number("z_max", out.z_max);
  section.read_number("modulus_error", out.modulus_error);
  section.read_number("common_error", out.common_error);
  out.prefix = section.text("prefix", out.prefix);
  out.host_prefix = section.text("host_prefix", out.host_prefix);
  section.done();
  return out;
}

/// The sections of one kind, [[key]].
std::vector<RunSection> each(const toml::table& file, const std::string& path, const std::string& key,
                             const RunSection& whole) {
  std::vector<RunSection> out;
  if (!file.contains(key)) return out;
  const toml::array* list = file[key].as_array();
  for (std::size_t i = 0; list != nullptr && i < list->size(); ++i) {
    const toml::table* keys = list->get(i)->as_table();
    if (keys == nullptr) list = nullptr;
    if (keys != nullptr) out.emplace_back(*keys, path, fmt::format("[[{}]] {}", key, i + 1));
  }
  if (list == nullptr)
    throw InputError(whole.place(key), fmt::format("{} is not a list of tables", key),
                     fmt::format("write [[{}]]", key));
  return out;
}

}  // namespace

SimulationOptions read_simulation_file(const std::filesystem::path& path) {
  const toml::table file = parse_toml(read_text_file(path), path.string());
  const std::string name = path.string();
  RunSection whole(file, name, "the simulation file");
  SimulationOptions out;
  out.origin = name;
  out.seed = static_cast<std::uint64_t>(whole.integer("seed", 1, 0));
  out.template_scatter = whole.flag("template_scatter", out.template_scatter);
  const auto section = [&](const char* key) {
    if (!file.contains(key)) return RunSection(name, fmt::format("[{}]", key));
    const toml::table* keys = file[key].as_table();
    if (keys == nullptr)
      throw InputError(whole.place(key), fmt::format("{} is not a section", key), fmt::format("write [{}]", key));
    return RunSection(*keys, name, fmt::format("[{}]", key));
  };
  const std::string sections[] = {"relation", "population", "velocities", "milky_way",
                                  "passband", "survey",     "calibrators"};
  whole.know(sections);
  whole.done();
  out.relation = read_relation(section("relation"));
  out.population = read_population(section("population"));
  out.velocities = read_velocities(section("velocities"));
  out.milky_way = read_milky_way(section("milky_way"));
  for (const RunSection& one : each(file, name, "passband", whole)) out.passbands.push_back(read_passband(one));
  for (const RunSection& one : each(file, name, "survey", whole)) out.surveys.push_back(read_survey(one));
  out.calibrators = read_calibrators(section("calibrators"));
  check_simulation(out);
  return out;
}

}  // namespace thirdrung
