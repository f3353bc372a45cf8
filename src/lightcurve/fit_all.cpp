#include <fmt/format.h>

#include <map>
#include <optional>

#include "base/parallel.h"
#include "base/progress.h"
#include "lightcurve/fit.h"

namespace thirdrung {

namespace {

/// The fit, or why there is none.
struct Outcome {
  std::optional<LightCurveFit> fit;
  std::string reason;
};

Outcome fit_one(const LightCurve& light_curve, const Supernova* supernova, const PreparedTemplate& prepared,
                const PassbandCatalogue& catalogue, const Extinction& dust, const FitOptions& options) {
  if (!supernova) return {std::nullopt, fmt::format("no row in the supernova table of {}", light_curve.survey)};
  try {
    LightCurveFit fit = fit_light_curve(light_curve, *supernova, prepared, catalogue, dust, options);
    if (fit.epochs_used == 0) return {std::nullopt, text_of(fit.remarks)};
    return {std::move(fit), ""};
  } catch (const InputError& fault) {
    return {std::nullopt, fault.what()};
  }
}

}  // namespace

LightCurveFits fit_all(std::span<const LightCurve> light_curves, std::span<const Supernova> supernovae,
                       const PreparedTemplate& prepared, const PassbandCatalogue& catalogue, const Extinction& dust,
                       const FitOptions& options, int threads, Progress* progress) {
  std::map<std::pair<std::string, std::string>, const Supernova*> by_name;
  for (const Supernova& supernova : supernovae) by_name.try_emplace({supernova.survey, supernova.name}, &supernova);
  std::vector<Outcome> outcomes(light_curves.size());
  std::optional<Progress> own;
  if (progress == nullptr) progress = &own.emplace("Light curves", light_curves.size());
  parallel_for(light_curves.size(), threads, [&](std::size_t i) {
    const auto found = by_name.find({light_curves[i].survey, light_curves[i].supernova});
    outcomes[i] =
        fit_one(light_curves[i], found == by_name.end() ? nullptr : found->second, prepared, catalogue, dust, options);
    progress->advance();
  });
  LightCurveFits out;
  for (std::size_t i = 0; i < outcomes.size(); ++i) {
    if (outcomes[i].fit) {
      out.fits.push_back(std::move(*outcomes[i].fit));
    } else {
      out.set_aside.push_back({light_curves[i].supernova, light_curves[i].survey, std::move(outcomes[i].reason)});
    }
  }
  return out;
}

}  // namespace thirdrung
