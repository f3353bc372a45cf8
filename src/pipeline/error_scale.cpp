#include "pipeline/error_scale.h"

#include <fmt/format.h>

#include <set>
#include <vector>

#include "base/text.h"

namespace thirdrung {

namespace {

constexpr double least_factor = 0.1;
constexpr double most_factor = 10;

}  // namespace

void ErrorScale::apply(Photometry& photometry, const PassbandCatalogue& catalogue) const {
  std::set<std::string> present;
  for (const LightCurve& one : photometry.light_curves) present.insert(one.passbands.begin(), one.passbands.end());
  const std::vector<std::string> known(present.begin(), present.end());
  for (const auto& [passband, factor] : of_passband) {
    if (present.contains(passband)) continue;
    if (!photometry.set_aside.empty() && catalogue.has(passband)) continue;
    const std::string near = nearest_word(passband, known);
    throw InputError(
        place, fmt::format("error_scale names the passband {}, which the photometry lacks", passband),
        near.empty() ? fmt::format("it has {}", fmt::join(known, ", ")) : fmt::format("did you mean {}?", near));
  }
  for (LightCurve& one : photometry.light_curves) {
    for (Epoch& epoch : one.epochs) {
      const auto own = of_passband.find(one.passbands[epoch.passband]);
      epoch.flux_error *= own == of_passband.end() ? of_all : own->second;
    }
  }
}

ErrorScale read_error_scale(RunSection& survey) {
  const std::string key = "error_scale";
  ErrorScale out{survey.place(key), 1, {}};
  if (survey.is_list(key)) {
    throw InputError(survey.place(key), "error_scale of [[survey]] is a list",
                     "give one number, or { passband = number }");
  }
  if (!survey.is_table(key)) {
    out.of_all = survey.number_between(key, 1, least_factor, most_factor);
    return out;
  }
  RunSection passbands = survey.inside(key);
  for (const std::string& passband : passbands.keys())
    out.of_passband[passband] = passbands.number_between(passband, 1, least_factor, most_factor);
  return out;
}

}  // namespace thirdrung
