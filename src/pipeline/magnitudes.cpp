#include <fmt/format.h>

#include <cmath>
#include <set>

#include "base/error.h"
#include "pipeline/standardisation_stage.h"
#include "pipeline/table_tools.h"

namespace thirdrung {

namespace {

std::vector<double> optional_reals(const Table& table, const std::string& name, const std::string& unit) {
  if (!table.has(name)) return std::vector<double>(table.rows(), missing_value);
  return unit.empty() ? table.reals(name) : table.reals_in(name, unit);
}

void refuse_bad_rows(const Table& table, const Magnitudes& all) {
  std::set<std::string> seen;
  for (std::size_t i = 0; i < all.supernovae.size(); ++i) {
    const FlowSupernova& one = all.supernovae[i];
    const auto k = static_cast<Eigen::Index>(i);
    if (!seen.insert(one.name).second)
      throw InputError(table.place(i, "supernova"), fmt::format("{} occurs twice", one.name), "keep one of the rows");
    if (!(one.z_flow > 0))
      throw InputError(table.place(i, "z_flow"), fmt::format("the redshift is {:g}", one.z_flow),
                       "give a positive one or take the row out");
    if (!std::isfinite(one.m_b_standardised))
      throw InputError(table.place(i, "m_b_standardised"), "the magnitude is missing", "give it or take the row out");
    if (!(all.fit_variance(k) + all.intrinsic_variance(k) > 0))
      throw InputError(table.place(i, "fit_variance"), "the variance is not positive", "give a positive one");
  }
}

}  // namespace

Magnitudes read_magnitudes(const Table& table) {
  Magnitudes all;
  const auto name = table.strings("supernova");
  const auto surveys = table.strings("surveys");
  const auto magnitude = table.reals_in("m_b_standardised", "mag");
  const auto z_flow = table.reals("z_flow");
  const auto fit = table.reals_in("fit_variance", "mag2");
  const auto intrinsic = optional_reals(table, "intrinsic_variance", "mag2");
  const auto z_helio = optional_reals(table, "z_helio", "");
  const auto ra = optional_reals(table, "ra", "deg"), dec = optional_reals(table, "dec", "deg");
  const auto s = optional_reals(table, "s", ""), c = optional_reals(table, "c", "mag");
  const auto mass = optional_reals(table, "host_log_mass", "dex"), t_0 = optional_reals(table, "t_0", "d");
  all.z_helio_error = optional_reals(table, "z_helio_error", "");
  all.mass_probability = optional_reals(table, "host_mass_probability", "");
  all.selection_bias = optional_reals(table, "selection_bias", "mag");
  for (double& bias : all.selection_bias) bias = std::isfinite(bias) ? bias : 0.0;
  all.in_sample = table.has("in_sample") ? table.flags("in_sample") : std::vector<bool>(table.rows(), true);
  all.fit_variance.resize(static_cast<Eigen::Index>(table.rows()));
  all.intrinsic_variance.resize(static_cast<Eigen::Index>(table.rows()));
  for (std::size_t i = 0; i < table.rows(); ++i) {
    const auto k = static_cast<Eigen::Index>(i);
    all.supernovae.push_back({name[i], split_list(surveys[i], ","), ra[i], dec[i], z_helio[i], z_flow[i], magnitude[i],
                              s[i], c[i], mass[i], t_0[i]});
    all.fit_variance(k) = fit[i];
    all.intrinsic_variance(k) = std::isnan(intrinsic[i]) ? 0.0 : intrinsic[i];
  }
  refuse_bad_rows(table, all);
  return all;
}

Magnitudes some_of(const Magnitudes& all, const std::vector<bool>& keep) {
  Magnitudes some;
  const auto places = places_of(keep);
  some.fit_variance = all.fit_variance(places);
  some.intrinsic_variance = all.intrinsic_variance(places);
  for (const Eigen::Index place : places) {
    const auto i = static_cast<std::size_t>(place);
    some.supernovae.push_back(all.supernovae[i]);
    some.z_helio_error.push_back(all.z_helio_error[i]);
    some.mass_probability.push_back(all.mass_probability[i]);
    some.selection_bias.push_back(all.selection_bias[i]);
    some.in_sample.push_back(all.in_sample[i]);
  }
  return some;
}

}  // namespace thirdrung
