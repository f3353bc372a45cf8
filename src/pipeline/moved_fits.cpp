#include <algorithm>
#include <array>
#include <cmath>
#include <map>
#include <set>

#include "base/progress.h"
#include "lightcurve/results.h"
#include "pipeline/table_tools.h"
#include "pipeline/varied_inputs.h"

namespace thirdrung {

namespace {

using Key = std::pair<std::string, std::string>;

/// A fit that moves farther than this in t_0 has jumped to another solution [d].
constexpr double jump = 1.0;

std::vector<Key> keys_of(const Table& fits) {
  const auto survey = fits.strings("survey"), supernova = fits.strings("supernova");
  std::vector<Key> out;
  for (std::size_t i = 0; i < survey.size(); ++i) out.emplace_back(survey[i], supernova[i]);
  return out;
}

std::vector<LightCurve> touched(const MovedInput& moved, const std::vector<LightCurve>& all) {
  std::vector<LightCurve> out;
  for (const LightCurve& one : all) {
    const bool survey = moved.surveys.empty() ||
                        std::find(moved.surveys.begin(), moved.surveys.end(), one.survey) != moved.surveys.end();
    const bool band = moved.passbands.empty() || std::any_of(one.passbands.begin(), one.passbands.end(), [&](auto& id) {
                        return std::find(moved.passbands.begin(), moved.passbands.end(), id) != moved.passbands.end();
                      });
    if (survey && band) out.push_back(one);
  }
  return out;
}

/// The baseline's fits with those in `anew` in place of the old ones, but for those that jumped.
Table replaced(const Table& fits, const Table& anew) {
  std::map<Key, double> old_t_0;
  const auto old_keys = keys_of(fits), new_keys = keys_of(anew);
  const auto old_dates = fits.reals("t_0"), new_dates = anew.reals("t_0");
  for (std::size_t i = 0; i < old_keys.size(); ++i) old_t_0[old_keys[i]] = old_dates[i];
  std::vector<bool> take, keep;
  std::set<Key> gone;
  for (std::size_t i = 0; i < new_keys.size(); ++i) {
    const auto old = old_t_0.find(new_keys[i]);
    take.push_back(old != old_t_0.end() && std::abs(new_dates[i] - old->second) < jump);
    if (take.back()) gone.insert(new_keys[i]);
  }
  for (const Key& key : old_keys) keep.push_back(!gone.contains(key));
  const std::array<Table, 2> both = {rows_of(fits, keep), rows_of(anew, take)};
  return stacked(both);
}

}  // namespace

Table fits_with(const MovedInput& moved, const RunFile& run, const RunInputs& inputs, const Table& fits) {
  if (!moved.refits_light_curves) return fits;
  const auto light_curves = touched(moved, inputs.light_curves);
  if (light_curves.empty()) return fits;
  Progress silent("", 0);
  FitOptions options = run.lightcurve;
  options.curves = false;
  const LightCurveFits found =
      fit_all(light_curves, inputs.supernovae, PreparedTemplate(inputs.trained.model), inputs.catalogue,
              Extinction(run.milky_way.law, run.milky_way.r_v), options, run.threads, &silent);
  const Table anew = fits_table(found.fits);
  return anew.rows() > 0 ? replaced(fits, anew) : fits;
}

}  // namespace thirdrung
