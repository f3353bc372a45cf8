#include <array>
#include <cmath>
#include <set>

#include "lightcurve/results.h"

namespace thirdrung {

namespace {

std::vector<std::string> split(const std::string& text, const std::string& separator) {
  std::vector<std::string> out;
  for (std::size_t start = 0; start < text.size();) {
    const std::size_t end = std::min(text.find(separator, start), text.size());
    if (end > start) out.push_back(text.substr(start, end - start));
    start = end + separator.size();
  }
  return out;
}

/// An entry of the upper triangle of the covariance and the column that holds it.
struct Entry {
  Eigen::Index row;
  Eigen::Index column;
  const char* name;
  const char* unit;
};
constexpr std::array<Entry, 6> off_diagonal = {{{0, 1, "cov_t0_mb", "d mag"},
                                                {0, 2, "cov_t0_s", "d"},
                                                {0, 3, "cov_t0_c", "d mag"},
                                                {1, 2, "cov_mb_s", "mag"},
                                                {1, 3, "cov_mb_c", "mag2"},
                                                {2, 3, "cov_s_c", "mag"}}};
constexpr std::array<Entry, 4> diagonal = {
    {{0, 0, "t_0_error", "d"}, {1, 1, "m_b_error", "mag"}, {2, 2, "s_error", ""}, {3, 3, "c_error", "mag"}}};

std::vector<double> reals(const Table& table, const Entry& entry) {
  return *entry.unit ? table.reals_in(entry.name, entry.unit) : table.reals(entry.name);
}

void fill_covariances(const Table& table, std::vector<FittedSupernova>& out) {
  for (const Entry& entry : diagonal) {
    const auto values = reals(table, entry);
    for (std::size_t i = 0; i < out.size(); ++i) {
      out[i].fit.covariance(entry.row, entry.column) = values[i] * values[i];
    }
  }
  for (const Entry& entry : off_diagonal) {
    const auto values = reals(table, entry);
    for (std::size_t i = 0; i < out.size(); ++i) {
      out[i].fit.covariance(entry.row, entry.column) = values[i];
      out[i].fit.covariance(entry.column, entry.row) = values[i];
    }
  }
  for (const FittedSupernova& one : out) {
    const Eigen::Matrix4d& covariance = one.fit.covariance;
    if (!std::isfinite(one.fit.m_b) || !covariance.allFinite()) continue;
    if (!is_definite(covariance)) {
      throw InputError(one.place, "the covariance of " + one.fit.supernova + " is not positive definite",
                       "fit the light curve again");
    }
  }
}

}  // namespace

std::vector<FittedSupernova> read_fits(const Table& table) {
  std::vector<FittedSupernova> out(table.rows());
  const auto supernova = table.strings("supernova");
  const auto survey = table.strings("survey");
  std::set<std::pair<std::string, std::string>> seen;
  for (std::size_t i = 0; i < out.size(); ++i) {
    out[i].place = table.place(i, "");
    out[i].fit.supernova = supernova[i];
    out[i].fit.survey = survey[i];
    if (!seen.insert({survey[i], supernova[i]}).second) {
      throw InputError(table.place(i, "supernova"), supernova[i] + " appears twice for survey \"" + survey[i] + "\"",
                       "keep one of the rows");
    }
  }
  const auto fill = [&](const std::vector<double>& values, double LightCurveFit::*member) {
    for (std::size_t i = 0; i < out.size(); ++i) out[i].fit.*member = values[i];
  };
  fill(table.reals("z_helio"), &LightCurveFit::z_helio);
  fill(table.reals_in("t_0", "d"), &LightCurveFit::t_0);
  fill(table.reals_in("m_b", "mag"), &LightCurveFit::m_b);
  fill(table.reals("s"), &LightCurveFit::s);
  fill(table.reals_in("c", "mag"), &LightCurveFit::c);
  fill(table.reals("chi2"), &LightCurveFit::chi2);
  fill(table.reals("fit_probability"), &LightCurveFit::fit_probability);
  fill(table.reals_in("first_phase", "d"), &LightCurveFit::first_phase);
  fill(table.reals_in("last_phase", "d"), &LightCurveFit::last_phase);
  fill(table.reals_in("dm15_b", "mag"), &LightCurveFit::dm15_b);
  const auto dof = table.integers("dof");
  const auto epochs_used = table.integers("epochs_used");
  const auto mistrusted = table.integers("mistrusted_epochs");
  const auto bands_used = table.strings("bands_used");
  const auto bands_left_out = table.strings("bands_left_out");
  const auto trusted = table.flags("trusted");
  const auto remarks = table.strings("remarks");
  for (std::size_t i = 0; i < out.size(); ++i) {
    LightCurveFit& fit = out[i].fit;
    fit.dof = static_cast<int>(dof[i]);
    fit.epochs_used = static_cast<int>(epochs_used[i]);
    fit.bands_used = split(bands_used[i], ",");
    for (const std::string& text : split(bands_left_out[i], "; ")) {
      const std::size_t colon = text.find(": ");
      fit.bands_left_out.push_back(
          {text.substr(0, colon), colon == std::string::npos ? std::string() : text.substr(colon + 2)});
    }
    out[i].mistrusted_epochs = static_cast<int>(mistrusted[i]);
    out[i].trusted = trusted[i];
    out[i].remarks = remarks[i];
  }
  fill_covariances(table, out);
  return out;
}

}  // namespace thirdrung
