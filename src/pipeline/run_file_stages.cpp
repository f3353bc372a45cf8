// The sections of the run file from the light curves to the intercept.
#include <fmt/format.h>

#include "pipeline/run_file_sections.h"

namespace thirdrung {

namespace {

const std::vector<std::string> reddening_sources = {"table", "map", "table_then_map"};

void read_maps(RunSection& section, MilkyWayInput& dust) {
  const auto maps = section.texts("maps");
  if (!maps.empty() && maps.size() != 2) {
    throw InputError(section.place("maps"), fmt::format("maps names {} files", maps.size()),
                     "give the northern and the southern image, or name a HEALPix map with healpix");
  }
  if (!maps.empty()) {
    dust.map_north = section.path_of("maps", maps[0]);
    dust.map_south = section.path_of("maps", maps[1]);
  }
  dust.map_healpix = section.optional_path("healpix");
  if (!maps.empty() && dust.map_healpix.given()) {
    throw InputError(section.place("healpix"), "both maps and healpix are given", "keep one of them");
  }
  dust.map.column = section.text("healpix_column", "");
  dust.map.healpix_frame = section.text("healpix_frame", "");
  dust.map.recalibration = section.number_between("recalibration", 1.0, 0.1, 10.0);
}

Expansion read_expansion(RunSection& section) {
  const std::vector<std::string> forms = {"series", "flat_lcdm"};
  const std::string form = section.choice("expansion", forms);
  const bool series = form == "series";
  for (const char* key : {"q0", "j0", "omega_m"}) {
    if (section.has(key) && series == (std::string(key) == "omega_m")) {
      throw InputError(section.place(key), fmt::format("{} has no meaning with expansion = \"{}\"", key, form),
                       "leave it out, or choose the other expansion");
    }
  }
  const double q0 = section.number_between("q0", -0.55, -2.0, 2.0);
  const double j0 = section.number_between("j0", 1.0, -10.0, 10.0);
  const double omega_m = section.number_between("omega_m", 0.3, 0.0, 1.0);
  return series ? Expansion::series(q0, j0) : Expansion::flat_lcdm(omega_m);
}

std::optional<Prior> read_prior(RunSection& section, const std::string& key) {
  if (!section.has(key)) {
    section.inside(key);
    return std::nullopt;
  }
  RunSection inner = section.inside(key);
  const Prior prior{inner.number("mean", key.front() == 's' ? 1.0 : 0.0),
                    inner.number_between("width", 1.0, 1e-6, 1e6)};
  inner.done();
  return prior;
}

}  // namespace

void read_milky_way_section(RunSection section, RunFile& run) {
  MilkyWayInput& dust = run.milky_way;
  dust.law = dust_law_from_name(section.text("law", "fitzpatrick99"), section.place("law"));
  dust.r_v = section.number_between("r_v", 3.1, 2.0, 6.0);
  const std::string source = section.choice("source", reddening_sources);
  dust.source = source == "table" ? ReddeningSource::table
                : source == "map" ? ReddeningSource::map
                                  : ReddeningSource::table_then_map;
  read_maps(section, dust);
  dust.scale = section.number_between("scale", 1.0, 0.0, 10.0);
  if (dust.source != ReddeningSource::table && !dust.has_map()) {
    throw InputError(section.place("source"), fmt::format("source = \"{}\" needs a map, and none is named", source),
                     "give maps (a Lambert pair) or healpix");
  }
  section.done();
}

void read_lightcurve_section(RunSection section, RunFile& run) {
  FitOptions& fit = run.lightcurve;
  fit.phase_min = section.number_between("phase_min", fit.phase_min, -30, 0);
  fit.phase_max = section.number_between("phase_max", fit.phase_max, 1, 120);
  fit.template_scatter = section.flag("template_scatter", fit.template_scatter);
  fit.robust = section.flag("robust", fit.robust);
  fit.robust_scale = section.number_between("robust_scale", fit.robust_scale, 0.5, 100);
  fit.mistrust_below = section.number_between("mistrust_below", fit.mistrust_below, 0, 1);
  fit.most_mistrusted = section.number_between("most_mistrusted", fit.most_mistrusted, 0, 1);
  fit.s_min = section.number_between("s_min", fit.s_min, 0.1, 1);
  fit.s_max = section.number_between("s_max", fit.s_max, 1, 3);
  fit.c_min = section.number_between("c_min", fit.c_min, -5, 0);
  fit.c_max = section.number_between("c_max", fit.c_max, 0, 10);
  fit.s_prior = read_prior(section, "s_prior");
  fit.c_prior = read_prior(section, "c_prior");
  section.done();
}

void read_redshift_section(RunSection section, RunFile& run) {
  RedshiftOptions& options = run.redshift.options;
  options.velocity = velocity_source_from_name(section.text("velocity", "infall"), section.place("velocity"));
  options.sigma_v = section.number_between("sigma_v", options.sigma_v, 0, 3000);
  options.use_group = section.flag("use_group", options.use_group);
  const double strength = section.number_between("strength", 1.0, -10, 10);
  options.column_scale = strength;
  options.infall.strength = strength;
  run.redshift.grid.scale = strength;
  RunSection sun = section.inside("sun");
  options.sun.speed = sun.number_between("speed", options.sun.speed, 0, 2000);
  options.sun.l = sun.number_between("l", options.sun.l, 0, 360);
  options.sun.b = sun.number_between("b", options.sun.b, -90, 90);
  sun.done();
  const std::vector<std::string> schemes = {"cmb_frame", "as_published"};
  options.infall.scheme =
      section.choice("infall_scheme", schemes) == "cmb_frame" ? InfallScheme::cmb_frame : InfallScheme::as_published;
  run.redshift.velocity_field = section.optional_path("velocity_field");
  run.redshift.grid.beta = section.optional_number("beta");
  const std::vector<std::string> outside = {"no_correction", "external_flow"};
  run.redshift.grid.outside = section.choice("outside_field", outside) == "no_correction"
                                  ? VelocityGridOptions::Outside::no_correction
                                  : VelocityGridOptions::Outside::external_flow;
  if (options.velocity == VelocitySource::grid && !run.redshift.velocity_field.given()) {
    throw InputError(section.place("velocity"), "velocity = \"grid\" needs a velocity field, and none is named",
                     "give velocity_field");
  }
  section.done();
}

void read_cuts_section(RunSection section, RunFile& run) {
  std::vector<std::pair<std::string, std::string>> settings;
  for (const std::string& key : section.keys()) {
    if (key == "z_min" || key == "z_max") {
      throw InputError(section.place(key), "the redshift range is not a key of [cuts]", "set it in [intercept]");
    }
  }
  std::vector<std::string> names = cut_names();
  std::erase_if(names, [](const std::string& name) { return name == "z_min" || name == "z_max"; });
  section.know(names);
  section.done();
  for (const std::string& key : section.keys())
    settings = {{key, section.plain(key)}}, cut_limits_from(settings, section.place(key));
  settings.clear();
  for (const std::string& key : section.keys()) settings.emplace_back(key, section.plain(key));
  run.cuts = cut_limits_from(settings, section.place(""));
  run.cuts.z_min = run.intercept.options.z_min;
  run.cuts.z_max = run.intercept.options.z_max;
}

void read_standardisation_section(RunSection section, RunFile& run) {
  const std::vector<std::string> methods = {"hierarchical", "ordinary"};
  run.standardisation.ordinary = section.choice("method", methods) == "ordinary";
  HierarchicalOptions& options = run.standardisation.options;
  for (const auto& [key, member] :
       {std::pair{"alpha", &HierarchicalOptions::alpha}, std::pair{"beta", &HierarchicalOptions::beta},
        std::pair{"gamma", &HierarchicalOptions::gamma}, std::pair{"sigma_int", &HierarchicalOptions::sigma_int}}) {
    options.*member = section.optional_number(key);
    if (run.standardisation.ordinary && options.*member) {
      throw InputError(section.place(key), fmt::format("the ordinary fit cannot hold {}", key),
                       "use method = \"hierarchical\"");
    }
  }
  options.population_per_survey = section.flag("population_per_survey", options.population_per_survey);
  options.restricted_widths = section.flag("restricted_widths", options.restricted_widths);
  options.host_mass.step = section.number_between("mass_step", options.host_mass.step, 5, 14);
  options.host_mass.default_error =
      section.number_between("mass_default_error", options.host_mass.default_error, 0.001, 5);
  run.refit_with_systematics = section.flag("refit_with_systematics", true);
  options.host_mass.mass_offset = section.number_between("mass_offset", 0.0, -3, 3);
  section.done();
}

void read_intercept_section(RunSection section, RunFile& run) {
  InterceptOptions& options = run.intercept.options;
  options.z_min = section.number_between("z_min", options.z_min, 0.0, 3.0);
  options.z_max = section.number_between("z_max", options.z_max, 0.0, 3.0);
  if (options.z_min >= options.z_max) {
    throw InputError(section.place("z_min"),
                     fmt::format("z_min of {:g} is not below z_max of {:g}", options.z_min, options.z_max),
                     "mend one of the two");
  }
  options.flow.expansion = read_expansion(section);
  options.flow.helio_factor = section.flag("helio_factor", options.flow.helio_factor);
  options.fit_q0 = section.flag("fit_q0", options.fit_q0);
  options.fit_dipole = section.flag("fit_dipole", options.fit_dipole);
  options.fewest = static_cast<std::size_t>(section.integer("fewest", 10, 2));
  run.intercept.velocity_covariance = section.flag("velocity_covariance", false);
  run.intercept.velocity_amplitude = section.number_between("velocity_amplitude", 1.0, 0, 10);
  run.intercept.velocity_smoothing = section.number_between("velocity_smoothing", 4.0, 0, 100);
  section.done();
  run.redshift.grid.expansion = options.flow.expansion;
}

}  // namespace thirdrung
