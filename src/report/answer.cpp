#include "report/answer.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "report/digits.h"
#include "report/ladder_rows.h"

namespace thirdrung {
namespace {

bool known(double value) {
  return std::isfinite(value);
}

/// Errors below this many decimals are shown as the value is, so that the three numbers of the line agree in length.
int decimals_of_answer(const RunSummary& summary) {
  double smallest = summary.intercept.error;
  for (const double error : {summary.error_stat, summary.error_sys}) {
    if (known(error) && error > 0 && !(error > smallest)) smallest = error;
  }
  return known(smallest) ? decimals_for(smallest) : 4;
}

void add_facts(const RunSummary& summary, Answer& answer) {
  if (summary.supernovae) answer.facts.emplace_back("supernovae", fmt::format("{}", *summary.supernovae));
  if (known(summary.scatter_mag)) answer.facts.emplace_back("scatter", fixed(summary.scatter_mag, 3) + " mag");
  if (known(summary.z_min) && known(summary.z_max)) {
    answer.facts.emplace_back("redshifts", fmt::format("{:.4g} to {:.4g}", summary.z_min, summary.z_max));
  }
  const std::pair<const char*, const char*> labels[] = {
      {"alpha", "α"}, {"beta", "β"}, {"gamma", "γ"}, {"sigma_int", "σ_int"}};
  const char* const units[] = {"", "", " mag", " mag"};
  std::size_t k = 0;
  for (const auto& [name, label] : labels) {
    const Measured value = summary.parameter(name);
    if (known(value.value)) answer.facts.emplace_back(label, with_error(value.value, value.error) + units[k]);
    ++k;
  }
}

std::string leading_error(const RunTables& run) {
  const RunSummary& summary = run.summary;
  std::string sentence;
  if (known(summary.error_stat) && known(summary.error_sys)) {
    const double ratio = summary.error_stat / summary.error_sys;
    if (ratio > 1.25)
      sentence = "Statistics lead the error";
    else if (ratio < 0.8)
      sentence = "Systematics lead the error";
    else
      sentence = "Statistics and systematics weigh alike";
  }
  if (!run.budget || !run.budget->has("source") || !run.budget->has("ab_contribution")) {
    return sentence.empty() ? sentence : sentence + ".";
  }
  const auto sources = run.budget->strings("source");
  const auto sizes = run.budget->reals("ab_contribution");
  std::size_t largest = 0;
  for (std::size_t i = 1; i < sizes.size(); ++i) {
    if (std::abs(sizes[i]) > std::abs(sizes[largest]) || !known(sizes[largest])) largest = i;
  }
  if (!known(sizes[largest])) return sentence.empty() ? sentence : sentence + ".";
  const double size = std::abs(sizes[largest]);
  return fmt::format("{}: the largest single source is {} ({} in a_B).", sentence.empty() ? "Error budget" : sentence,
                     sources[largest], fixed(size, decimals_for(size)));
}

std::string choices(const RunTables& run) {
  if (!run.scans) return "";
  const auto axes = run.scans->strings("scan");
  const auto settings = run.scans->strings("setting");
  const auto shifts = run.scans->reals("delta_ab");
  const auto errors = reals_or_missing(*run.scans, "delta_ab_error");
  std::size_t varied = 0, beyond = 0, most = shifts.size();
  double most_sigma = -1;
  for (std::size_t i = 0; i < shifts.size(); ++i) {
    if (!known(shifts[i]) || !known(errors[i]) || errors[i] <= 0) continue;
    ++varied;
    const double sigma = std::abs(shifts[i]) / errors[i];
    if (sigma > 2) ++beyond;
    if (sigma > most_sigma) most_sigma = sigma, most = i;
  }
  if (varied == 0) return "";
  const std::string largest = fmt::format("the most telling is {}: {}, Δa_B = {}", axes[most], settings[most],
                                          signed_with_error(shifts[most], errors[most]));
  // 4.55 % of a Gaussian lies beyond two standard deviations; the choices share supernovae, hence "were they
  // independent".
  const double by_chance = 0.0455 * static_cast<double>(varied);
  return fmt::format(
      "Of {} choices varied, {} a_B by more than twice the error of the difference ({:.1f} would by chance, were they "
      "independent); {}.",
      varied,
      beyond == 0   ? "none moves"
      : beyond == 1 ? "1 moves"
                    : fmt::format("{} move", beyond),
      by_chance, largest);
}

std::string single_supernova(const RunTables& run) {
  if (!run.influence) return "";
  const auto names = run.influence->strings("supernova");
  const auto shifts = run.influence->reals("delta_ab");
  std::size_t most = 0;
  for (std::size_t i = 1; i < shifts.size(); ++i) {
    if (std::abs(shifts[i]) > std::abs(shifts[most]) || !known(shifts[most])) most = i;
  }
  if (!known(shifts[most])) return "";
  const double error = run.summary.intercept.error;
  std::string share;
  if (known(error) && error > 0) share = fmt::format(", {:.0f} % of its error", 100 * std::abs(shifts[most]) / error);
  // Two digits of the shift itself.
  return fmt::format("No single supernova moves a_B by more than {}{} ({}).",
                     fixed(std::abs(shifts[most]), decimals_for(std::abs(shifts[most]))), share, names[most]);
}

/// "Of the variance of log H0, 61 % is from calibrators, 25 % from the Hubble flow, ...".
std::string sides_of_the_ladder(const RunTables& run) {
  if (!has_ladder(run)) return "";
  std::string list;
  for (const auto& [source, share] : ladder_rows(run).shares) {
    if (std::abs(share) < 0.0005) continue;  // A run without systematics need not speak of them.
    list += fmt::format(", {} %{} from {}", fixed(100.0 * share, 0), list.empty() ? " is" : "", source);
  }
  return list.empty() ? "" : fmt::format("Of the variance of log H0{}.", list);
}

}  // namespace

Answer make_answer(const RunTables& run) {
  const RunSummary& summary = run.summary;
  Answer answer;
  answer.known = known(summary.intercept.value);
  answer.blind = summary.blind;
  if (answer.known) {
    const int decimals = decimals_of_answer(summary);
    answer.symbol_value = fixed(summary.intercept.value, decimals);
    if (known(summary.error_stat)) answer.statistical = fixed(summary.error_stat, decimals);
    if (known(summary.error_sys)) answer.systematic = fixed(summary.error_sys, decimals);
    if (known(summary.intercept.error)) answer.total = fixed(summary.intercept.error, decimals);
  }
  if (known(summary.hubble_constant.value)) {
    answer.hubble_constant = with_error(summary.hubble_constant.value, summary.hubble_constant.error);
  }
  if (summary.calibrators && known(summary.absolute_magnitude.value)) {
    answer.absolute_magnitude =
        fmt::format("{} mag, from {}", with_error(summary.absolute_magnitude.value, summary.absolute_magnitude.error),
                    counted(*summary.calibrators, "calibrator", "calibrators"));
  }
  add_facts(summary, answer);
  if (answer.blind) {
    answer.qualifications.push_back(
        answer.absolute_magnitude.empty()
            ? "This run is blind: the value shown carries a hidden offset; errors and differences are true."
            : "This run is blind: a_B, M_B and H0 carry hidden constants; errors and differences are true.");
  }
  for (const std::string& sentence :
       {leading_error(run), sides_of_the_ladder(run), choices(run), single_supernova(run)}) {
    if (!sentence.empty()) answer.qualifications.push_back(sentence);
  }
  answer.warnings = summary.warnings;
  return answer;
}

std::string answer_line(const Answer& answer) {
  if (!answer.known) return "no intercept in this run";
  std::string line = "a_B = " + answer.symbol_value;
  if (!answer.statistical.empty()) line += " ± " + answer.statistical + " (stat)";
  if (!answer.systematic.empty()) line += " ± " + answer.systematic + " (sys)";
  if (answer.statistical.empty() && answer.systematic.empty() && !answer.total.empty()) line += " ± " + answer.total;
  if (answer.blind) line += "  [blind]";
  return line;
}

}  // namespace thirdrung
