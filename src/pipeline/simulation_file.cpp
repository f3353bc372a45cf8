#include "pipeline/simulation_file.h"

#include <fmt/format.h>
#include <toml++/toml.h>

#include "base/error.h"
#include "base/text.h"
#include "pipeline/run_section.h"

namespace thirdrung {

namespace {

toml::table parse(const std::filesystem::path& path) {
  const std::string content = read_text_file(path);
  try {
    return toml::parse(content, path.string());
  } catch (const toml::parse_error& fault) {
    throw InputError({path.string(), std::size_t{fault.source().begin.line}, {}}, std::string(fault.description()),
                     "mend the TOML there");
  }
}

double required(RunSection& section, const std::string& key) {
  const auto value = section.optional_number(key);
  if (!value) throw InputError(section.place(key), fmt::format("{} lacks the key {}", section.name(), key), "give it");
  return *value;
}

void read_number(RunSection& section, const char* key, double& value) {
  value = section.number(key, value);
}

SimulatedRelation read_relation(RunSection section) {
  SimulatedRelation out;
  read_number(section, "h0", out.h0);
  read_number(section, "absolute_magnitude", out.absolute_magnitude);
  read_number(section, "q0", out.expansion.q0);
  read_number(section, "j0", out.expansion.j0);
  read_number(section, "alpha", out.alpha);
  read_number(section, "beta", out.beta);
  read_number(section, "gamma", out.gamma);
  read_number(section, "mass_step", out.mass_step);
  read_number(section, "sigma_int", out.sigma_int);
  section.done();
  return out;
}

SimulatedPopulation read_population(RunSection section) {
  SimulatedPopulation out;
  read_number(section, "s_peak", out.s_peak);
  read_number(section, "s_width_below", out.s_width_below);
  read_number(section, "s_width_above", out.s_width_above);
  read_number(section, "s_min", out.s_min);
  read_number(section, "s_max", out.s_max);
  read_number(section, "c_mean", out.c_mean);
  read_number(section, "c_width", out.c_width);
  read_number(section, "c_tail", out.c_tail);
  read_number(section, "c_max", out.c_max);
  read_number(section, "mass_mean", out.mass_mean);
  read_number(section, "mass_width", out.mass_width);
  read_number(section, "mass_error", out.mass_error);
  read_number(section, "mass_missing", out.mass_missing);
  section.done();
  return out;
}

SimulatedVelocities read_velocities(RunSection section) {
  SimulatedVelocities out;
  read_number(section, "sigma_v", out.sigma_v);
  read_number(section, "bulk_speed", out.bulk_speed);
  read_number(section, "bulk_l", out.bulk_direction.l);
  read_number(section, "bulk_b", out.bulk_direction.b);
  out.bulk_tabulated = section.flag("bulk_tabulated", out.bulk_tabulated);
  section.done();
  return out;
}

SimulatedMilkyWay read_milky_way(RunSection section) {
  SimulatedMilkyWay out;
  out.law = dust_law_from_name(section.text("law", name_of(out.law)), section.place("law"));
  read_number(section, "r_v", out.r_v);
  read_number(section, "ebv_at_pole", out.ebv_at_pole);
  read_number(section, "clumpiness", out.clumpiness);
  read_number(section, "ebv_max", out.ebv_max);
  read_number(section, "table_error", out.table_error);
  section.done();
  return out;
}

SimulatedPassband read_passband(RunSection section) {
  SimulatedPassband out;
  out.id = section.text("id");
  out.centre = required(section, "centre");
  out.width = required(section, "width");
  read_number(section, "edge", out.edge);
  read_number(section, "zero_point_error", out.zero_point_error);
  read_number(section, "wavelength_error", out.wavelength_error);
  read_number(section, "zero_point_shift", out.zero_point_shift);
  read_number(section, "wavelength_shift", out.wavelength_shift);
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
  read_number(section, "first_mjd", out.first_mjd);
  out.seasons = static_cast<int>(std::min<std::int64_t>(section.integer("seasons", out.seasons, 1), 1000));
  read_number(section, "season_length", out.season_length);
  read_number(section, "cadence", out.cadence);
  read_number(section, "cadence_scatter", out.cadence_scatter);
  read_number(section, "lost", out.lost);
  read_number(section, "first_phase", out.first_phase);
  read_number(section, "first_phase_scatter", out.first_phase_scatter);
  read_number(section, "last_phase", out.last_phase);
  read_number(section, "depth_scatter", out.depth_scatter);
  read_number(section, "noise_floor", out.noise_floor);
  out.magnitudes = section.flag("magnitudes", out.magnitudes);
}

void read_selection(RunSection& section, SimulatedSurvey& out) {
  out.detections = static_cast<int>(std::min<std::int64_t>(section.integer("detections", out.detections, 0), 1000));
  read_number(section, "detection_snr", out.detection_snr);
  read_number(section, "peak_limit", out.peak_limit);
  read_number(section, "peak_limit_width", out.peak_limit_width);
  out.shared_with = section.text("shared_with", out.shared_with);
  out.shared = static_cast<std::size_t>(section.integer("shared", 0, 0));
}

SimulatedSurvey read_survey(RunSection section) {
  SimulatedSurvey out;
  out.name = section.text("name");
  out.prefix = section.text("prefix", out.prefix);
  out.supernovae = static_cast<std::size_t>(section.integer("supernovae", 100, 0));
  read_number(section, "z_min", out.z_min);
  read_number(section, "z_max", out.z_max);
  read_number(section, "z_error", out.z_error);
  read_number(section, "dec_min", out.footprint.dec_min);
  read_number(section, "dec_max", out.footprint.dec_max);
  read_number(section, "ra_min", out.footprint.ra_min);
  read_number(section, "ra_max", out.footprint.ra_max);
  read_number(section, "galactic_latitude_min", out.footprint.galactic_latitude_min);
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
  read_number(section, "z_min", out.z_min);
  read_number(section, "z_max", out.z_max);
  read_number(section, "modulus_error", out.modulus_error);
  read_number(section, "common_error", out.common_error);
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
  const toml::table file = parse(path);
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
