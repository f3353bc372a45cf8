#pragma once

#include <functional>
#include <optional>
#include <span>
#include <string>
#include <utility>
#include <vector>

#include "base/error.h"
#include "sample/supernova.h"
#include "tables/table.h"

namespace thirdrung {

/// What the rules look at, one supernova. A missing number is NaN and does not pass a rule that needs it.
struct CutSubject {
  std::string supernova;
  std::string survey;
  double s = missing_value;
  double c = missing_value;          ///< [mag].
  double t_0_error = missing_value;  ///< [d].
  double m_b_error = missing_value;  ///< [mag].
  double s_error = missing_value;
  double c_error = missing_value;      ///< [mag].
  double first_phase = missing_value;  ///< Rest-frame phase of the first used epoch [d].
  double last_phase = missing_value;   ///< [d].
  double mw_ebv = missing_value;       ///< [mag].
  double z_flow = missing_value;
  double fit_probability = missing_value;
  int bands = 0;
  int epochs = 0;
  bool trusted = true;  ///< The light-curve fit's own verdict.
  double host_log_mass = missing_value;
};

/// Limits of the rules; nothing (in the run file: "off") where a rule is not used.
///
/// The defaults are the usual ones of the trade: |c| < 0.3 and a stretch range as published analyses have used since
/// Guy et al. 2010 (A&A 523, A7); first phase, peak-date error, reddening and fit probability as in Scolnic et al. 2022
/// (ApJ 938, 113, Table 2; from memory); the redshift range of Riess et al. 2022 (ApJL 934, L7). The errors of s and c
/// are our own choice.
struct CutLimits {
  std::optional<double> z_min = 0.0233;
  std::optional<double> z_max = 0.15;
  bool trusted = true;
  std::optional<double> c_max = 0.3;  ///< |c| below this.
  std::optional<double> s_min = 0.75;
  std::optional<double> s_max = 1.3;
  std::optional<double> s_error_max = 0.15;
  std::optional<double> c_error_max = 0.15;
  std::optional<double> m_b_error_max;
  std::optional<double> t_0_error_max = 2.0;
  std::optional<double> first_phase_max = 5.0;
  std::optional<double> last_phase_min = 5.0;
  std::optional<double> mw_ebv_max = 0.2;
  std::optional<double> fit_probability_min = 0.001;
  std::optional<double> bands_min = 2;
  std::optional<double> epochs_min = 5;
  std::optional<double> host_log_mass_min;
  std::optional<double> host_log_mass_max;
  bool host_mass = false;  ///< True: a supernova without a host mass is removed.
};

/// Limits from the keys and values of a run file: the members' names; a number or "off", and for trusted and host_mass
/// "true" or "false". Keys not named keep their default. Throws InputError, for an unknown key with the nearest known
/// one.
CutLimits cut_limits_from(std::span<const std::pair<std::string, std::string>> settings, const Place& place);

/// The keys that cut_limits_from knows.
std::vector<std::string> cut_names();

/// The keys and values of limits, so that cut_limits_from gives them back.
std::vector<std::pair<std::string, std::string>> cut_settings(const CutLimits& limits);

/// One rule: a supernova is kept if keeps(subject).
struct CutRule {
  std::string name;  ///< Key of the run file ("c_max").
  std::string text;  ///< As printed ("|c| < 0.3").
  std::function<bool(const CutSubject&)> keeps;
};

/// The rules in force, in the order of CutLimits.
std::vector<CutRule> cut_rules(const CutLimits& limits);

/// How many supernovae a rule removes.
struct CutCount {
  std::string rule;                  ///< Its text.
  std::size_t removed_alone = 0;     ///< By this rule if it were the only one.
  std::size_t removed_in_order = 0;  ///< By this rule of those the rules before it left.
  std::size_t left = 0;              ///< After it.
};

struct CutResult {
  std::vector<bool> used;                            ///< One a subject.
  std::vector<std::vector<std::string>> removed_by;  ///< Texts of every rule that removes it, in order; empty if used.
  std::vector<CutCount> counts;                      ///< One a rule.

  /// The first rule that removes subject i, "" if none.
  std::string first_rule(std::size_t i) const { return removed_by[i].empty() ? "" : removed_by[i].front(); }
  /// All of them, "; " between.
  std::string all_rules(std::size_t i) const;
};

CutResult apply_cuts(std::span<const CutSubject> subjects, std::span<const CutRule> rules);

/// The table of a run: rule, removed_alone, removed_in_order, left.
Table cuts_table(const CutResult& result);

}  // namespace thirdrung
