#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <set>

#include "base/error.h"
#include "pipeline/varied_inputs.h"
#include "template/template_file.h"

namespace thirdrung {

namespace {

bool holds(const std::vector<std::string>& list, const std::string& word) {
  return std::find(list.begin(), list.end(), word) != list.end();
}

/// For a light curve or a supernova.
template <typename Observed>
bool in_scope(const SystematicInput& input, const Observed& one) {
  return input.surveys.empty() || holds(input.surveys, one.survey);
}

/// Does something to every supernova in scope.
std::function<void(RunFile&, RunInputs&)> for_supernovae(const SystematicInput& input,
                                                         std::function<void(Supernova&)> change) {
  return [input, change = std::move(change)](RunFile&, RunInputs& all) {
    for (Supernova& one : all.supernovae) {
      if (in_scope(input, one)) change(one);
    }
  };
}

/// Passbands that the light curves in scope were observed in, in order of name.
std::vector<std::string> passbands_in_scope(const SystematicInput& input, const RunInputs& inputs) {
  std::set<std::string> out;
  for (const LightCurve& one : inputs.light_curves) {
    if (in_scope(input, one)) out.insert(one.passbands.begin(), one.passbands.end());
  }
  if (input.passbands.empty()) return {out.begin(), out.end()};
  std::vector<std::string> named;
  for (const std::string& id : input.passbands) {
    Place place = input.place;
    place.column = "passbands";
    inputs.catalogue.at(id, place);
    if (out.contains(id)) named.push_back(id);
  }
  return named;
}

/// Magnitudes added to everything tabulated in a passband.
void add_to_magnitudes(const SystematicInput& input, const std::string& passband, double magnitudes,
                       bool tabulated_alone, RunInputs& inputs) {
  const double factor = std::pow(10.0, -0.4 * magnitudes);
  for (std::size_t k = 0; k < inputs.light_curves.size(); ++k) {
    LightCurve& one = inputs.light_curves[k];
    if (!in_scope(input, one) || (tabulated_alone && !inputs.from_magnitudes[k])) continue;
    for (Epoch& epoch : one.epochs) {
      if (one.passbands[epoch.passband] != passband) continue;
      epoch.flux *= factor;
      epoch.flux_error *= factor;
    }
  }
}

/// The template as it would be, had the passband's calibration been another in its training too.
void follow_training(const std::string& passband, double size, Eigen::VectorXd CalibrationResponse::*response,
                     RunInputs& inputs) {
  for (const CalibrationResponse& one : inputs.trained.responses) {
    if (one.passband == passband) inputs.trained.model = moved_template(inputs.trained.model, size * (one.*response));
  }
}

bool trained_on(const RunInputs& inputs, const std::string& passband) {
  return std::any_of(inputs.trained.responses.begin(), inputs.trained.responses.end(),
                     [&](const CalibrationResponse& one) { return one.passband == passband; });
}

void move_curve(const SystematicInput& input, const std::string& id, double angstrom, RunInputs& inputs) {
  CalibratedPassband moved = inputs.catalogue.at(id);
  const double rate = moved.passband.photon_rate_ab_zero(), zero = moved.ab_magnitude_of_zero;
  moved.passband = moved.passband.shifted(angstrom);
  if (moved.system == MagnitudeSystem::standard && inputs.standard_star)
    moved.ab_magnitude_of_zero = ab_magnitude(*inputs.standard_star, moved.passband);
  if (moved.system == MagnitudeSystem::synthetic)
    moved.ab_magnitude_of_zero += 2.5 * std::log10(moved.passband.photon_rate_ab_zero() / rate);
  const double change = moved.ab_magnitude_of_zero - zero;
  PassbandCatalogue catalogue;
  for (const std::string& one : inputs.catalogue.ids()) catalogue.add(one == id ? moved : inputs.catalogue.at(one));
  inputs.catalogue = std::move(catalogue);
  add_to_magnitudes(input, id, change, true, inputs);
}

void move_passband(const SystematicInput& input, const std::string& id, double size, RunInputs& inputs) {
  if (input.kind == SystematicKind::zero_point) {
    add_to_magnitudes(input, id, size, false, inputs);
    follow_training(id, size, &CalibrationResponse::zero_point, inputs);
  } else {
    move_curve(input, id, size, inputs);
    follow_training(id, size, &CalibrationResponse::wavelength, inputs);
  }
}

double catalogue_size(const SystematicInput& input, const CalibratedPassband& passband) {
  return input.kind == SystematicKind::zero_point ? passband.zero_point_error : passband.wavelength_error;
}

std::vector<MovedInput> moved_passbands(const SystematicInput& input, const RunInputs& inputs) {
  const bool zero_point = input.kind == SystematicKind::zero_point;
  const std::string what = zero_point ? "zero point" : "wavelength";
  std::vector<std::pair<std::string, double>> sizes;
  for (const std::string& id : passbands_in_scope(input, inputs)) {
    const double size = input.size.value_or(catalogue_size(input, inputs.catalogue.at(id)));
    if (size > 0) sizes.emplace_back(id, size);
  }
  if (sizes.empty()) {
    throw InputError(input.place, fmt::format("no passband in scope has a {} error", what),
                     "give size, or the errors in the passband catalogue");
  }
  std::vector<MovedInput> out;
  for (const auto& one : sizes) {
    const bool join_first = input.together && !out.empty();
    if (!join_first) {
      MovedInput moved;
      moved.name = input.together ? (input.name.empty() ? what + " (common)" : input.name) : what + " " + one.first;
      moved.kind = what;
      moved.size = one.second;
      moved.unit = zero_point ? "mag" : "Angstrom";
      moved.refits_light_curves = true;
      moved.surveys = input.surveys;
      out.push_back(std::move(moved));
    }
    MovedInput& moved = out.back();
    moved.passbands.push_back(one.first);
    moved.move = [input, before = moved.move, one](RunFile& run, RunInputs& all) {
      if (before) before(run, all);
      move_passband(input, one.first, one.second, all);
    };
  }
  // Where the template was trained on the passband, every light curve moves with it.
  for (MovedInput& moved : out) {
    const bool everywhere = std::any_of(moved.passbands.begin(), moved.passbands.end(),
                                        [&](const std::string& id) { return trained_on(inputs, id); });
    if (everywhere) moved.passbands.clear(), moved.surveys.clear();
  }
  return out;
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

}  // namespace

std::vector<MovedInput> moved_inputs(const SystematicInput& input, const RunInputs& inputs) {
  if (input.kind == SystematicKind::zero_point || input.kind == SystematicKind::wavelength)
    return moved_passbands(input, inputs);
  if (input.kind == SystematicKind::template_training) return template_modes(input, inputs);
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
  return {std::move(moved)};
}

}  // namespace thirdrung
