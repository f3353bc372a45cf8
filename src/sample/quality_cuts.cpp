#include "sample/quality_cuts.h"

#include <fmt/format.h>

#include <cmath>
#include <cstdint>

namespace thirdrung {
namespace {

using Value = std::function<double(const CutSubject&)>;

// Comparisons with NaN are false: a missing number does not pass.
void below(std::vector<CutRule>& rules, const char* name, const char* quantity, const std::optional<double>& limit,
           Value value) {
  if (!limit) return;
  rules.push_back({name, fmt::format("{} < {:g}", quantity, *limit),
                   [value = std::move(value), edge = *limit](const CutSubject& s) { return value(s) < edge; }});
}

void above(std::vector<CutRule>& rules, const char* name, const char* quantity, const std::optional<double>& limit,
           Value value) {
  if (!limit) return;
  rules.push_back({name, fmt::format("{} > {:g}", quantity, *limit),
                   [value = std::move(value), edge = *limit](const CutSubject& s) { return value(s) > edge; }});
}

void at_least(std::vector<CutRule>& rules, const char* name, const char* quantity, const std::optional<double>& limit,
              Value value) {
  if (!limit) return;
  rules.push_back({name, fmt::format("{} >= {:g}", quantity, *limit),
                   [value = std::move(value), edge = *limit](const CutSubject& s) { return value(s) >= edge; }});
}

}  // namespace

std::vector<CutRule> cut_rules(const CutLimits& limits) {
  std::vector<CutRule> rules;
  const Value z = [](const CutSubject& s) { return s.z_flow; };
  const Value stretch = [](const CutSubject& s) { return s.s; };
  const Value mass = [](const CutSubject& s) { return s.host_log_mass; };
  above(rules, "z_min", "z_flow", limits.z_min, z);
  below(rules, "z_max", "z_flow", limits.z_max, z);
  if (limits.trusted) rules.push_back({"trusted", "fit is trusted", [](const CutSubject& s) { return s.trusted; }});
  below(rules, "c_max", "|c|", limits.c_max, [](const CutSubject& s) { return std::abs(s.c); });
  above(rules, "s_min", "s", limits.s_min, stretch);
  below(rules, "s_max", "s", limits.s_max, stretch);
  below(rules, "s_error_max", "s_error", limits.s_error_max, [](const CutSubject& s) { return s.s_error; });
  below(rules, "c_error_max", "c_error", limits.c_error_max, [](const CutSubject& s) { return s.c_error; });
  below(rules, "m_b_error_max", "m_b_error", limits.m_b_error_max, [](const CutSubject& s) { return s.m_b_error; });
  below(rules, "t_0_error_max", "t_0_error", limits.t_0_error_max, [](const CutSubject& s) { return s.t_0_error; });
  below(rules, "first_phase_max", "first_phase", limits.first_phase_max,
        [](const CutSubject& s) { return s.first_phase; });
  above(rules, "last_phase_min", "last_phase", limits.last_phase_min, [](const CutSubject& s) { return s.last_phase; });
  below(rules, "mw_ebv_max", "mw_ebv", limits.mw_ebv_max, [](const CutSubject& s) { return s.mw_ebv; });
  above(rules, "fit_probability_min", "fit_probability", limits.fit_probability_min,
        [](const CutSubject& s) { return s.fit_probability; });
  at_least(rules, "bands_min", "bands", limits.bands_min, [](const CutSubject& s) { return s.bands; });
  at_least(rules, "epochs_min", "epochs", limits.epochs_min, [](const CutSubject& s) { return s.epochs; });
  above(rules, "host_log_mass_min", "host_log_mass", limits.host_log_mass_min, mass);
  below(rules, "host_log_mass_max", "host_log_mass", limits.host_log_mass_max, mass);
  if (limits.host_mass) {
    rules.push_back(
        {"host_mass", "host mass is known", [](const CutSubject& s) { return std::isfinite(s.host_log_mass); }});
  }
  return rules;
}

std::string CutResult::all_rules(std::size_t i) const {
  std::string text;
  for (const std::string& rule : removed_by[i]) text += (text.empty() ? "" : "; ") + rule;
  return text;
}

CutResult apply_cuts(std::span<const CutSubject> subjects, std::span<const CutRule> rules) {
  CutResult result;
  result.used.assign(subjects.size(), true);
  result.removed_by.resize(subjects.size());
  std::size_t left = subjects.size();
  for (const CutRule& rule : rules) {
    CutCount count{rule.text, 0, 0, 0};
    for (std::size_t i = 0; i < subjects.size(); ++i) {
      if (rule.keeps(subjects[i])) continue;
      ++count.removed_alone;
      result.removed_by[i].push_back(rule.text);
      if (result.used[i]) ++count.removed_in_order;
      result.used[i] = false;
    }
    left -= count.removed_in_order;
    count.left = left;
    result.counts.push_back(count);
  }
  return result;
}

Table cuts_table(const CutResult& result) {
  std::vector<std::string> rule;
  std::vector<std::int64_t> alone;
  std::vector<std::int64_t> in_order;
  std::vector<std::int64_t> left;
  for (const CutCount& count : result.counts) {
    rule.push_back(count.rule);
    alone.push_back(static_cast<std::int64_t>(count.removed_alone));
    in_order.push_back(static_cast<std::int64_t>(count.removed_in_order));
    left.push_back(static_cast<std::int64_t>(count.left));
  }
  Table table;
  table.add_strings("rule", rule, "what a supernova must satisfy");
  table.add_integers("removed_alone", alone, "", "supernovae this rule removes by itself");
  table.add_integers("removed_in_order", in_order, "", "supernovae it removes of those the rules before it left");
  table.add_integers("left", left, "", "supernovae left after it");
  return table;
}

}  // namespace thirdrung
