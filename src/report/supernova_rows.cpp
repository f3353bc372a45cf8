#include "report/supernova_rows.h"

#include <algorithm>
#include <cmath>
#include <map>

namespace thirdrung {
namespace {

struct RealField {
  const char* column;
  double SupernovaRow::*member;
};

constexpr RealField sample_fields[] = {
    {"ra", &SupernovaRow::ra},
    {"dec", &SupernovaRow::dec},
    {"z_helio", &SupernovaRow::z_helio},
    {"z_cmb", &SupernovaRow::z_cmb},
    {"z_flow", &SupernovaRow::z_flow},
    {"z_flow_error", &SupernovaRow::z_flow_error},
    {"v_pec", &SupernovaRow::v_pec},
    {"mw_ebv", &SupernovaRow::mw_ebv},
    {"host_log_mass", &SupernovaRow::host_log_mass},
    {"host_log_mass_error", &SupernovaRow::host_log_mass_error},
    {"host_mass_probability", &SupernovaRow::host_mass_probability},
};

// What sample and light-curve fits both have; the sample's, combined over surveys, goes first.
constexpr RealField fit_fields[] = {
    {"t_0", &SupernovaRow::t_0},
    {"t_0_error", &SupernovaRow::t_0_error},
    {"m_b", &SupernovaRow::m_b},
    {"m_b_error", &SupernovaRow::m_b_error},
    {"s", &SupernovaRow::s},
    {"s_error", &SupernovaRow::s_error},
    {"c", &SupernovaRow::c},
    {"c_error", &SupernovaRow::c_error},
    {"cov_mb_s", &SupernovaRow::cov_mb_s},
    {"cov_mb_c", &SupernovaRow::cov_mb_c},
    {"cov_s_c", &SupernovaRow::cov_s_c},
    {"chi2", &SupernovaRow::chi2},
    {"dof", &SupernovaRow::dof},
    {"fit_probability", &SupernovaRow::fit_probability},
    {"first_phase", &SupernovaRow::first_phase},
    {"last_phase", &SupernovaRow::last_phase},
    {"dm15_b", &SupernovaRow::dm15_b},
    {"z_helio", &SupernovaRow::z_helio},
};

constexpr RealField standard_fields[] = {
    {"z_flow", &SupernovaRow::z_flow},
    {"m_b_standardised", &SupernovaRow::m_standard},
    {"m_b_standardised_error", &SupernovaRow::m_standard_error},
    {"residual", &SupernovaRow::residual},
    {"residual_error", &SupernovaRow::residual_error},
    {"weight", &SupernovaRow::weight},
};

constexpr RealField influence_fields[] = {
    {"delta_ab", &SupernovaRow::influence},
    {"delta_ab_error", &SupernovaRow::influence_error},
};

/// Rows of the result that the rows of `table` belong to; unknown supernovae are added.
std::vector<std::size_t> rows_of(const Table& table, SupernovaRows& all) {
  std::vector<std::size_t> places;
  for (const std::string& name : table.strings("supernova")) {
    const auto [entry, added] = all.index.try_emplace(name, all.rows.size());
    if (added) {
      all.rows.emplace_back();
      all.rows.back().name = name;
    }
    places.push_back(entry->second);
  }
  return places;
}

/// Takes over what the row does not have yet.
template <std::size_t n>
void take(const Table& table, const std::vector<std::size_t>& places, const RealField (&fields)[n],
          SupernovaRows& all) {
  for (const RealField& field : fields) {
    if (!table.has(field.column)) continue;
    const std::vector<double> values = table.reals(field.column);
    for (std::size_t i = 0; i < values.size(); ++i) {
      double& target = all.rows[places[i]].*field.member;
      if (!std::isfinite(target)) target = values[i];
    }
  }
}

void append(std::string& list, const std::string& item, const std::string& separator) {
  if (item.empty()) return;
  list += (list.empty() ? "" : separator) + item;
}

void take_sample(const Table& table, SupernovaRows& all) {
  const auto places = rows_of(table, all);
  take(table, places, sample_fields, all);
  take(table, places, fit_fields, all);
  const auto surveys = strings_or_empty(table, table.has("surveys") ? "surveys" : "survey");
  const auto used = flags_or(table, "used", true);
  const auto removed = strings_or_empty(table, "removed_by");
  const auto removed_all = strings_or_empty(table, "removed_by_all");
  for (std::size_t i = 0; i < places.size(); ++i) {
    SupernovaRow& row = all.rows[places[i]];
    row.survey = surveys[i];
    row.used = used[i];
    row.removed_by = removed[i];
    row.removed_by_all = removed_all[i].empty() ? removed[i] : removed_all[i];
  }
}

void take_fits(const Table& table, SupernovaRows& all) {
  const auto places = rows_of(table, all);
  take(table, places, fit_fields, all);
  const auto surveys = strings_or_empty(table, "survey");
  const auto bands = strings_or_empty(table, "bands_used");
  const auto left_out = strings_or_empty(table, "bands_left_out");
  const auto remarks = strings_or_empty(table, "remarks");
  const auto trusted = flags_or(table, "trusted", true);
  const auto mistrusted = reals_or_missing(table, "mistrusted_epochs");
  for (std::size_t i = 0; i < places.size(); ++i) {
    SupernovaRow& row = all.rows[places[i]];
    if (row.survey.empty()) row.survey = surveys[i];
    append(row.bands, bands[i], ",");
    append(row.bands_left_out, left_out[i], "; ");
    append(row.remarks, remarks[i], "; ");
    row.trusted = row.trusted && trusted[i];
    if (std::isfinite(mistrusted[i])) row.mistrusted_epochs += static_cast<int>(mistrusted[i]);
  }
}

void take_standardised(const Table& table, bool has_sample, SupernovaRows& all) {
  const auto places = rows_of(table, all);
  take(table, places, standard_fields, all);
  const auto surveys = strings_or_empty(table, "survey");
  const auto mistrusted = flags_or(table, "chauvenet_mistrusted", false);
  for (std::size_t i = 0; i < places.size(); ++i) {
    SupernovaRow& row = all.rows[places[i]];
    if (row.survey.empty()) row.survey = surveys[i];
    if (!has_sample) row.used = true;
    row.chauvenet_mistrusted = mistrusted[i];
  }
}

}  // namespace

SupernovaRows join_supernova_rows(const RunTables& run) {
  SupernovaRows all;
  if (run.sample) take_sample(*run.sample, all);
  if (run.fits) take_fits(*run.fits, all);
  if (run.standardised) take_standardised(*run.standardised, run.sample.has_value(), all);
  if (run.influence) take(*run.influence, rows_of(*run.influence, all), influence_fields, all);

  std::map<std::string, std::size_t> counts;
  for (const SupernovaRow& row : all.rows) ++counts[row.survey];
  std::vector<std::pair<std::string, std::size_t>> ranked(counts.begin(), counts.end());
  std::stable_sort(ranked.begin(), ranked.end(), [](const auto& a, const auto& b) { return a.second > b.second; });
  for (const auto& [survey, count] : ranked) all.surveys.push_back(survey);
  return all;
}

}  // namespace thirdrung
