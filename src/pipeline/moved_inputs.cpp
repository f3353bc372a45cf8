#include <fmt/format.h>
#include <fmt/ranges.h>

#include "pipeline/moved_passbands.h"
#include "template/template_file.h"

namespace thirdrung {

namespace {

/// Does something to every supernova in scope.
std::function<void(RunFile&, RunInputs&)> for_supernovae(const SystematicInput& input,
                                                         std::function<void(Supernova&)> change) {
  return [input, change = std::move(change)](RunFile&, RunInputs& all) {
    for (Supernova& one : all.supernovae) {
      if (in_scope(input, one)) change(one);
    }
  };
}

std::vector<MovedInput> template_modes(const SystematicInput& input, const RunInputs& inputs) {
  std::vector<MovedInput> out;
  for (Eigen::Index k = 0; k < inputs.trained.covariance_modes.cols(); ++k) {
    MovedInput moved{fmt::format("template mode {}", k + 1), "template", *input.size, "sigma", true, {}, {}, {}};
    moved.move = [k, size = *input.size](RunFile&, RunInputs& all) {
      all.trained.model = moved_template(all.trained.model, size * all.trained.covariance_modes.col(k));
    };
    out.push_back(std::move(moved));
  }
  return out;
}

struct Single {
  const char* name;
  const char* kind;
  const char* unit;
  bool refits;
  std::function<void(RunFile&, RunInputs&)> move;
};

Single single_input(const SystematicInput& input) {
  const double size = input.size.value_or(1.0);
  switch (input.kind) {
    case SystematicKind::milky_way_scale:
      return {"Milky Way reddening scale", "Milky Way", "of E(B-V)", true,
              for_supernovae(input, [size](Supernova& one) { one.mw_ebv *= 1.0 + size; })};
    case SystematicKind::milky_way_zero:
      return {"Milky Way reddening zero", "Milky Way", "mag", true,
              for_supernovae(input, [size](Supernova& one) { one.mw_ebv += size; })};
    case SystematicKind::dust_law:
      return {"Milky Way dust law", "Milky Way", "of the other law", true, [](RunFile& run, RunInputs&) {
                run.milky_way.law =
                    run.milky_way.law == DustLaw::fitzpatrick99 ? DustLaw::odonnell94 : DustLaw::fitzpatrick99;
              }};
    case SystematicKind::template_file:
      return {"other template", "template", "of the difference", true, [input](RunFile&, RunInputs& all) {
                require_exists(input.file);
                all.trained = read_template(input.file.path);
              }};
    case SystematicKind::redshift:
      // Light curves too: the redshift sets their K-correction and their clock.
      return {"redshift offset", "redshift", "in z", true, for_supernovae(input, [size](Supernova& one) {
                one.z_helio += size;
                one.z_group += size;
              })};
    case SystematicKind::velocity_strength:
      return {"velocity field strength", "velocity", "of the field", false, [size](RunFile& run, RunInputs& all) {
                all.redshifts.column_scale *= 1.0 + size;
                all.redshifts.infall.strength *= 1.0 + size;
                if (all.redshifts.grid) {
                  run.redshift.grid.scale *= 1.0 + size;
                  all.redshifts = read_redshift_options(run);
                }
              }};
    case SystematicKind::velocity_source:
      return {"other velocity field", "velocity", "of the difference", false, [input](RunFile& run, RunInputs& all) {
                run.redshift.options.velocity = input.velocity;
                if (input.file.given()) run.redshift.velocity_field = input.file;
                all.redshifts = read_redshift_options(run);
              }};
    case SystematicKind::velocity_scatter:
      return {"velocity scatter", "velocity", "km / s", false, [size](RunFile& run, RunInputs& all) {
                run.redshift.options.sigma_v += size;
                all.redshifts.sigma_v += size;
              }};
    case SystematicKind::sun_motion:
      return {"Sun's speed", "redshift", "km / s", false,
              [size](RunFile&, RunInputs& all) { all.redshifts.sun.speed += size; }};
    case SystematicKind::mass_step:
      return {"mass of the host step", "host mass", "dex", false,
              [size](RunFile& run, RunInputs&) { run.standardisation.options.host_mass.step += size; }};
    case SystematicKind::mass_offset:
      return {"scale of host masses", "host mass", "dex", false,
              [size](RunFile& run, RunInputs&) { run.standardisation.options.host_mass.mass_offset += size; }};
    case SystematicKind::population:
      return {"population shape", "standardisation", "of the difference", false, [](RunFile& run, RunInputs&) {
                bool& split = run.standardisation.options.population_per_survey;
                split = !split;
              }};
    case SystematicKind::selection_limit:
      return {"magnitude limit", "selection", "mag", false, [input, size](RunFile& run, RunInputs&) {
                for (auto& [survey, limit] : run.magnitude_limits) {
                  if (input.surveys.empty() || holds(input.surveys, survey)) limit.m_b += size;
                }
              }};
    case SystematicKind::q0:
      return {"q0", "expansion", "", false, [size](RunFile& run, RunInputs&) {
                Expansion& expansion = run.intercept.options.flow.expansion;
                expansion = expansion.form == Expansion::Form::series
                                ? Expansion::series(expansion.q0 + size, expansion.j0)
                                : Expansion::flat_lcdm(expansion.omega_m + size / 1.5);
              }};
    default:
      return {"j0", "expansion", "", false,
              [size](RunFile& run, RunInputs&) { run.intercept.options.flow.expansion.j0 += size; }};
  }
}

/// Kinds whose move is a whole alternative; the shift is then scaled by the size.
bool is_alternative(SystematicKind kind) {
  return kind == SystematicKind::dust_law || kind == SystematicKind::template_file ||
         kind == SystematicKind::velocity_source || kind == SystematicKind::population;
}

MovedInput moved_alone(const SystematicInput& input) {
  Single one = single_input(input);
  MovedInput moved;
  moved.name = input.name.empty() ? one.name : input.name;
  moved.kind = one.kind;
  moved.size = input.size.value_or(1.0);
  moved.unit = one.unit;
  moved.refits_light_curves = one.refits;
  moved.surveys = input.surveys;
  moved.move = std::move(one.move);
  moved.scaled_after = is_alternative(input.kind);
  moved.moves_weights = input.kind == SystematicKind::velocity_scatter;
  return moved;
}

/// The settings of a [[systematic]] but for its name, in one text.
std::string settings_of(const SystematicInput& input) {
  return fmt::format("{}\n{}\n{}\n{}\n{}\n{}\n{}", name_of(input.kind), input.size.value_or(0.0),
                     fmt::join(input.surveys, ","), fmt::join(input.passbands, ","), input.together, input.file.written,
                     name_of(input.velocity));
}

}  // namespace

std::vector<MovedInput> moved_inputs(const SystematicInput& input, const RunInputs& inputs) {
  std::vector<MovedInput> out;
  if (input.kind == SystematicKind::zero_point || input.kind == SystematicKind::wavelength)
    out = moved_passbands(input, inputs);
  else if (input.kind == SystematicKind::template_training)
    out = template_modes(input, inputs);
  else
    out.push_back(moved_alone(input));
  for (std::size_t k = 0; k < out.size(); ++k)
    out[k].identity = fmt::format("{}\n{} of {}", settings_of(input), k + 1, out.size());
  return out;
}

}  // namespace thirdrung
