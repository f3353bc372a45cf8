// The sections of the run file for systematics, scans, join and report.
#include <fmt/format.h>

#include <array>

#include "base/text.h"
#include "pipeline/run_file_sections.h"

namespace thirdrung {

namespace {

constexpr std::array<std::pair<SystematicKind, const char*>, 18> kind_names = {
    {{SystematicKind::zero_point, "zero_point"},
     {SystematicKind::wavelength, "wavelength"},
     {SystematicKind::milky_way_scale, "milky_way_scale"},
     {SystematicKind::milky_way_zero, "milky_way_zero"},
     {SystematicKind::dust_law, "dust_law"},
     {SystematicKind::template_training, "template_training"},
     {SystematicKind::template_file, "template_file"},
     {SystematicKind::redshift, "redshift"},
     {SystematicKind::velocity_strength, "velocity_strength"},
     {SystematicKind::velocity_source, "velocity_source"},
     {SystematicKind::velocity_scatter, "velocity_scatter"},
     {SystematicKind::sun_motion, "sun_motion"},
     {SystematicKind::mass_step, "mass_step"},
     {SystematicKind::mass_offset, "mass_offset"},
     {SystematicKind::population, "population"},
     {SystematicKind::selection_limit, "selection_limit"},
     {SystematicKind::q0, "q0"},
     {SystematicKind::j0, "j0"}}};

bool has_passbands(SystematicKind kind) {
  return kind == SystematicKind::zero_point || kind == SystematicKind::wavelength;
}

bool has_surveys(SystematicKind kind) {
  switch (kind) {
    case SystematicKind::zero_point:
    case SystematicKind::wavelength:
    case SystematicKind::milky_way_scale:
    case SystematicKind::milky_way_zero:
    case SystematicKind::dust_law:
    case SystematicKind::template_file:
    case SystematicKind::redshift:
    case SystematicKind::selection_limit:
      return true;
    default:
      return false;
  }
}

/// Size of kinds that have a usual one; nothing where the passband catalogue gives it.
std::optional<double> usual_size(SystematicKind kind) {
  switch (kind) {
    case SystematicKind::milky_way_scale:
      return 0.05;  // 5% of E(B-V): Schlafly & Finkbeiner 2011, ApJ 737, 103, as used by published budgets.
    case SystematicKind::milky_way_zero:
      return 0.005;
    case SystematicKind::redshift:
      return 4e-5;  // Carr et al. 2022, PASA 39, e046.
    case SystematicKind::velocity_strength:
      return 0.1;
    case SystematicKind::velocity_scatter:
      return 50;  // km/s: published analyses use 150 to 300; were all as likely, their deviation would be 43.
    case SystematicKind::sun_motion:
      return 0.11;  // km/s, Planck Collaboration I 2020.
    case SystematicKind::mass_step:
    case SystematicKind::mass_offset:
    case SystematicKind::selection_limit:
      return 0.2;
    case SystematicKind::q0:
      return 0.02;
    case SystematicKind::j0:
      return 0.1;
    case SystematicKind::zero_point:
    case SystematicKind::wavelength:
      return std::nullopt;
    default:
      return 1.0;
  }
}

ScanAxis axis_from(RunSection section, ScanKind kind) {
  ScanAxis axis;
  axis.kind = kind;
  axis.values = section.numbers("values");
  axis.second_values = section.numbers("second_values");
  axis.count = static_cast<std::size_t>(section.integer("count", 0, 0));
  axis.seed = static_cast<std::uint64_t>(section.integer("seed", 1, 0));
  section.done();
  return axis;
}

}  // namespace

std::string name_of(SystematicKind kind) {
  for (const auto& [known, name] : kind_names) {
    if (known == kind) return name;
  }
  return "";
}

SystematicKind systematic_kind(const std::string& name, const Place& place) {
  std::vector<std::string> names;
  for (const auto& [kind, known] : kind_names) {
    if (name == known) return kind;
    names.emplace_back(known);
  }
  const std::string near = nearest_word(name, names);
  throw InputError(place, fmt::format("there is no systematic of the kind \"{}\"", name),
                   near.empty() ? "docs/run-file.md lists the kinds" : fmt::format("did you mean \"{}\"?", near));
}

void read_systematic_section(RunSection section, RunFile& run) {
  SystematicInput input;
  input.place = section.place("kind");
  input.kind = systematic_kind(section.text("kind"), section.place("kind"));
  input.name = section.text("name", "");
  input.size = section.optional_number("size");
  if (input.size && !(*input.size > 0)) {
    throw InputError(section.place("size"), fmt::format("the size is {:g}", *input.size), "give a positive 1 sigma");
  }
  if (!input.size) input.size = usual_size(input.kind);
  input.surveys = section.texts("surveys");
  input.passbands = section.texts("passbands");
  input.together = section.flag("together", false);
  input.file = section.optional_path("file");
  if (const auto source = section.optional_text("velocity"))
    input.velocity = velocity_source_from_name(*source, section.place("velocity"));
  section.done();
  if (!has_passbands(input.kind) && (!input.passbands.empty() || section.has("together"))) {
    throw InputError(section.place(input.passbands.empty() ? "together" : "passbands"),
                     fmt::format("a systematic of the kind {} has no passbands", name_of(input.kind)), "leave it out");
  }
  if (!has_surveys(input.kind) && !input.surveys.empty()) {
    throw InputError(section.place("surveys"),
                     fmt::format("a systematic of the kind {} is one for all surveys", name_of(input.kind)),
                     "leave surveys out");
  }
  if (input.kind == SystematicKind::template_file && !input.file.given()) {
    throw InputError(section.place("file"), "the kind template_file needs another template", "give file");
  }
  if (input.velocity == VelocitySource::grid && !input.file.given()) {
    throw InputError(section.place("velocity"), "velocity = \"grid\" needs a velocity field", "give file");
  }
  refuse_unknown_surveys(input.surveys, section, run);
  if (input.kind == SystematicKind::selection_limit) {
    const auto limited = [&](const std::string& survey) { return run.magnitude_limits.contains(survey); };
    const bool any = input.surveys.empty() ? !run.magnitude_limits.empty()
                                           : std::any_of(input.surveys.begin(), input.surveys.end(), limited);
    if (!any)
      throw InputError(section.place("kind"), "no survey in scope has a magnitude limit", "state it in [[selection]]");
  }
  run.systematics.push_back(std::move(input));
}

void read_scans_section(RunSection section, RunFile& run) {
  ScansInput& scans = run.scans;
  scans.wanted = section.flag("all", false);
  const bool all = scans.wanted;
  scans.z_min = section.number_between("reach_min", scans.z_min, 1e-4, 3);
  scans.z_max = section.number_between("reach_max", scans.z_max, 1e-4, 3);
  const bool named_corrections = section.has("corrections"), named_cuts = section.has("cuts");
  scans.corrections = section.flag("corrections", all);
  scans.cuts = section.flag("cuts", all);
  scans.wanted = all || (named_corrections && scans.corrections) || (named_cuts && scans.cuts);
  for (ScanAxis axis : default_axes()) {
    const std::string key = name_of(axis.kind);
    if (!section.has(key)) {
      section.optional_number(key);
      if (all) scans.axes.push_back(axis);
      continue;
    }
    scans.wanted = true;
    if (section.is_flag(key)) {
      if (section.flag(key, true)) scans.axes.push_back(axis);
    } else if (section.is_list(key)) {
      axis.values = section.numbers(key);
      scans.axes.push_back(axis);
    } else {
      scans.axes.push_back(axis_from(section.inside(key), axis.kind));
    }
  }
  section.done();
  scans.z_min = std::min(scans.z_min, run.intercept.options.z_min);
  scans.z_max = std::max(scans.z_max, run.intercept.options.z_max);
}

void read_join_section(RunSection section, RunFile& run) {
  JoinInput& join = run.join;
  const auto m_b = section.optional_number("m_b");
  const auto m_b_error = section.optional_number("m_b_error");
  join.calibrators = section.optional_path("calibrators");
  join.covariance = section.optional_path("covariance");
  section.done();
  join.wanted = !section.keys().empty();
  if (!join.wanted) return;
  if (!run.blind_given) run.blind = true;
  if (join.covariance.given() && !join.calibrators.given()) {
    throw InputError(section.place("covariance"), "[join] has a covariance of distances, but no calibrators",
                     "give calibrators, or leave it out");
  }
  if (join.calibrators.given()) {
    if (!m_b && !m_b_error) return;
    throw InputError(section.place(m_b ? "m_b" : "m_b_error"),
                     "[join] has both an absolute magnitude m_b and calibrators", "keep one of the two");
  }
  if (!m_b || !m_b_error || !(*m_b_error > 0)) {
    throw InputError(section.place(m_b ? "m_b_error" : "m_b"),
                     "[join] needs m_b and a positive m_b_error, or calibrators", "give them");
  }
  join.m_b = *m_b;
  join.m_b_error = *m_b_error;
}

void read_report_section(RunSection section, RunFile& run) {
  run.report.page = section.flag("page", true);
  run.report.title = section.text("title", run.name);
  run.report.figures = section.flag("figures", false);
  run.report.light_curves = section.flag("light_curves", true);
  section.done();
}

}  // namespace thirdrung
