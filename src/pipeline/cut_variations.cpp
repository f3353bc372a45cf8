#include "pipeline/cut_variations.h"

#include <fmt/format.h>

#include <array>

namespace thirdrung {

namespace {

/// How far a limit is moved: by a step, or by a factor where that is more natural.
struct Step {
  std::optional<double> CutLimits::*member;
  const char* name;  ///< Of the rule (CutRule::name).
  double step;       ///< Added to tighten, taken off to loosen; 0: use the factor.
  double factor;     ///< Multiplied to tighten, divided by to loosen.
};

constexpr std::array<Step, 15> steps = {{{&CutLimits::c_max, "c_max", -0.1, 1},
                                         {&CutLimits::s_min, "s_min", 0.05, 1},
                                         {&CutLimits::s_max, "s_max", -0.1, 1},
                                         {&CutLimits::s_error_max, "s_error_max", 0, 1 / 1.5},
                                         {&CutLimits::c_error_max, "c_error_max", 0, 1 / 1.5},
                                         {&CutLimits::m_b_error_max, "m_b_error_max", 0, 1 / 1.5},
                                         {&CutLimits::t_0_error_max, "t_0_error_max", 0, 1 / 1.5},
                                         {&CutLimits::first_phase_max, "first_phase_max", -5, 1},
                                         {&CutLimits::last_phase_min, "last_phase_min", 5, 1},
                                         {&CutLimits::mw_ebv_max, "mw_ebv_max", 0, 1 / 1.5},
                                         {&CutLimits::fit_probability_min, "fit_probability_min", 0, 10},
                                         {&CutLimits::bands_min, "bands_min", 1, 1},
                                         {&CutLimits::epochs_min, "epochs_min", 2, 1},
                                         {&CutLimits::host_log_mass_min, "host_log_mass_min", 0.5, 1},
                                         {&CutLimits::host_log_mass_max, "host_log_mass_max", -0.5, 1}}};

std::string text_of_rule(const CutLimits& limits, const std::string& name) {
  for (const CutRule& rule : cut_rules(limits)) {
    if (rule.name == name) return rule.text;
  }
  return name;
}

}  // namespace

std::vector<CutVariation> cut_variations(const CutLimits& limits) {
  std::vector<CutVariation> out;
  for (const Step& step : steps) {
    if (!(limits.*step.member)) continue;
    for (const bool tighter : {true, false}) {
      CutVariation one{"", limits};
      double& limit = *(one.limits.*step.member);
      limit = step.step != 0 ? limit + (tighter ? step.step : -step.step)
                             : (tighter ? limit * step.factor : limit / step.factor);
      one.setting = fmt::format("{} ({})", text_of_rule(one.limits, step.name), tighter ? "tighter" : "looser");
      out.push_back(std::move(one));
    }
  }
  CutVariation hosts{"", limits};
  hosts.limits.host_mass = !limits.host_mass;
  hosts.setting = limits.host_mass ? "hosts without a mass too (looser)" : "hosts with a mass alone (tighter)";
  out.push_back(std::move(hosts));
  return out;
}

}  // namespace thirdrung
