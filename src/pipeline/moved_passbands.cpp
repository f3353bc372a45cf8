#include "pipeline/moved_passbands.h"

#include <fmt/format.h>

#include <cmath>
#include <set>

#include "base/error.h"

namespace thirdrung {

namespace {

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

}  // namespace

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

}  // namespace thirdrung
