#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <cstdint>
#include <set>

#include "base/text.h"
#include "pipeline/blinding.h"
#include "pipeline/calibrators.h"
#include "pipeline/summary.h"
#include "tables/read_write.h"

namespace thirdrung {

namespace fs = std::filesystem;

namespace {

/// Below so many supernovae the error of a_b itself is poorly known.
constexpr double few_supernovae = 30;
/// Of fewer the scatter is not known.
constexpr std::int64_t supernovae_for_errors = 10;
/// A chi-square less probable than this, either way, is not chance.
constexpr double improbable = 0.001;

std::optional<Table> result(const fs::path& folder, const std::string& name) {
  const fs::path path = folder / (name + ".ecsv");
  std::error_code ignored;
  if (!fs::exists(path, ignored)) return std::nullopt;
  return read_table(path);
}

std::string counted(std::size_t n, const char* one, const char* many) {
  return n == 1 ? fmt::format("1 {}", one) : fmt::format("{} {}", n, many);
}

void of_fits(const fs::path& folder, std::vector<std::string>& out) {
  if (const auto set_aside = result(folder, "set-aside"); set_aside && set_aside->rows() > 0) {
    out.push_back(fmt::format("{} set aside before the fit; set-aside.ecsv says why (the first, {}: {}).",
                              counted(set_aside->rows(), "supernova was", "supernovae were"),
                              set_aside->strings("supernova").front(), set_aside->strings("reason").front()));
  }
  const auto fits = result(folder, "lightcurve-fits");
  if (!fits) return;
  const auto trusted = fits->flags("trusted");
  const auto doubtful = static_cast<std::size_t>(std::count(trusted.begin(), trusted.end(), false));
  if (doubtful > 0)
    out.push_back(
        fmt::format("{} of {} light-curve fits are not trusted; their remarks in lightcurve-fits.ecsv say why.",
                    doubtful, fits->rows()));
  const auto left_out = fits->strings("bands_left_out");
  const auto with_left_out = static_cast<std::size_t>(
      std::count_if(left_out.begin(), left_out.end(), [](const std::string& text) { return !text.empty(); }));
  if (with_left_out > 0)
    out.push_back(fmt::format("{} had passbands left out, mostly for reaching beyond the template.",
                              counted(with_left_out, "supernova", "supernovae")));
}

/// Errors of passbands that the scatter of their own epochs contradicts.
void of_errors(const fs::path& folder, std::vector<std::string>& out) {
  const auto table = result(folder, "error-factors");
  if (!table) return;
  const auto survey = table->strings("survey"), passband = table->strings("passband");
  const auto factor = table->reals("error_factor"), error = table->reals("error_factor_error");
  const auto supernovae = table->integers("supernovae");
  std::vector<std::size_t> wrong;
  for (std::size_t i = 0; i < factor.size(); ++i) {
    if (supernovae[i] >= supernovae_for_errors && std::abs(factor[i] - 1) > std::max(0.1, 3 * error[i]))
      wrong.push_back(i);
  }
  if (wrong.empty()) return;
  // The largest factor, since errors too small do more harm than errors too large.
  const auto most = *std::max_element(wrong.begin(), wrong.end(),
                                      [&](std::size_t a, std::size_t b) { return factor[a] < factor[b]; });
  out.push_back(fmt::format(
      "Epochs of {} scatter by more, or less, than their errors and the template say (the most: {} {}, errors "
      "too {} by a factor of {:.2f} ± {:.2f}); error_scale of [[survey]] can be multiplied by the factors of "
      "error-factors.ecsv.",
      counted(wrong.size(), "passband", "passbands"), survey[most], passband[most],
      factor[most] > 1 ? "small" : "large", factor[most] > 1 ? factor[most] : 1 / factor[most],
      factor[most] > 1 ? error[most] : error[most] / (factor[most] * factor[most])));
}

void of_sample(const fs::path& folder, std::vector<std::string>& out) {
  const auto sample = result(folder, "sample");
  if (!sample) return;
  const auto used = sample->flags("used");
  const auto mass = sample->reals("host_log_mass");
  const auto agree =
      sample->has("surveys_agree") ? sample->reals("surveys_agree") : std::vector<double>(used.size(), 1);
  const auto remarks = sample->strings("remarks"), name = sample->strings("supernova");
  std::size_t without_mass = 0, outside = 0, in_use = 0;
  std::vector<std::string> disagree;
  for (std::size_t i = 0; i < used.size(); ++i) {
    if (!used[i]) continue;
    ++in_use;
    if (std::isnan(mass[i])) ++without_mass;
    if (remarks[i].find("outside the velocity field") != std::string::npos) ++outside;
    if (agree[i] < improbable) disagree.push_back(name[i]);
  }
  if (without_mass > 0)
    out.push_back(
        fmt::format("{} of {} supernovae have no host mass; they count as half above the step.", without_mass, in_use));
  if (outside > 0)
    out.push_back(fmt::format("{} of {} supernovae lie outside the velocity field and keep their peculiar velocity.",
                              outside, in_use));
  if (!disagree.empty())
    out.push_back(fmt::format("Surveys disagree, beyond chance, on the light curve of {} (the first: {}).",
                              counted(disagree.size(), "supernova", "supernovae"), disagree.front()));
}

void of_standardisation(const fs::path& folder, std::vector<std::string>& out) {
  const auto table = result(folder, "standardisation");
  if (!table) return;
  for (const auto& [key, text] : table->meta()) {
    if (key.starts_with("remark_")) out.push_back(text);
  }
}

void of_intercept(const fs::path& folder, std::vector<std::string>& out) {
  const auto table = result(folder, "intercept");
  if (!table) return;
  const auto names = table->strings("quantity");
  const auto values = table->reals("value");
  double supernovae = missing_value, probability = missing_value, chi2 = missing_value, dof = missing_value;
  for (std::size_t i = 0; i < names.size(); ++i) {
    if (names[i] == "supernovae") supernovae = values[i];
    if (names[i] == "probability") probability = values[i];
    if (names[i] == "chi2") chi2 = values[i];
    if (names[i] == "dof") dof = values[i];
  }
  if (supernovae < few_supernovae)
    out.push_back(fmt::format("Only {:.0f} supernovae: the error of a_B is itself uncertain by about {:.0f} %.",
                              supernovae, 100.0 / std::sqrt(2.0 * std::max(supernovae - 1.0, 1.0))));
  if (probability < improbable || probability > 1 - improbable)
    out.push_back(fmt::format("The residuals have chi2 = {:.1f} for {:.0f} degrees of freedom, which the errors {}.",
                              chi2, dof, probability < 0.5 ? "do not explain" : "are too large for"));
}

/// Calibrators left out; too few of them; distances and magnitudes that contradict each other.
void of_calibrators(const fs::path& folder, std::vector<std::string>& out) {
  const auto table = result(folder, "calibrators");
  if (!table) return;
  const auto names = table->strings("supernova"), why_not = table->strings("why_not");
  const auto used = table->flags("used");
  const auto residual = table->reals("residual"), error = table->reals("absolute_magnitude_error");
  std::vector<std::size_t> left_out, far;
  for (std::size_t i = 0; i < used.size(); ++i) {
    if (!used[i]) left_out.push_back(i);
    if (used[i] && std::abs(residual[i]) > 3 * error[i]) far.push_back(i);
  }
  const std::size_t in_use = used.size() - left_out.size();
  if (in_use < few_calibrators)
    out.push_back(fmt::format("Only {}: one bad distance or light curve would carry H0.",
                              counted(in_use, "calibrator", "calibrators")));
  if (!left_out.empty()) {
    constexpr std::size_t most = 4;
    std::string list;
    for (std::size_t k = 0; k < std::min(most, left_out.size()); ++k)
      list += fmt::format("{}{}: {}", k == 0 ? "" : "; ", names[left_out[k]], why_not[left_out[k]]);
    out.push_back(fmt::format("{} not used ({}{}); calibrators.ecsv has them all.",
                              counted(left_out.size(), "calibrator is", "calibrators are"), list,
                              left_out.size() > most ? "; ..." : ""));
  }
  if (!far.empty())
    out.push_back(fmt::format("{} more than 3 errors from M_B (the first: {}, by {:+.2f} mag).",
                              counted(far.size(), "calibrator lies", "calibrators lie"), names[far.front()],
                              residual[far.front()]));
}

void of_unblinding(const RunFile& run, std::vector<std::string>& out) {
  const auto record = read_unblinding(run.output);
  if (!record) return;
  out.push_back(fmt::format("Unblinded on {} by {}{}.", record->when, record->by,
                            record->run_file_sha256 == sha256_of_text(run.text)
                                ? ""
                                : "; the run file has changed since, so this is no longer a blind result"));
}

}  // namespace

std::vector<std::string> run_warnings(const RunFile& run, const fs::path& folder) {
  std::vector<std::string> out;
  of_intercept(folder, out);
  of_fits(folder, out);
  of_errors(folder, out);
  of_sample(folder, out);
  of_standardisation(folder, out);
  of_calibrators(folder, out);
  of_unblinding(run, out);
  return out;
}

}  // namespace thirdrung
