#include "standardisation/datum.h"

#include <fmt/format.h>

#include <Eigen/Cholesky>
#include <Eigen/LU>
#include <algorithm>
#include <cmath>
#include <map>
#include <set>

#include "base/chi_square.h"
#include "base/constants.h"
#include "base/error.h"

namespace thirdrung {

namespace {

void check_fit(const StandardisationDatum& d) {
  const Place place{fmt::format("supernova {}", d.name), std::nullopt, ""};
  if (!std::isfinite(d.m_b) || !std::isfinite(d.s) || !std::isfinite(d.c)) {
    throw InputError(place, "its m_b, s or c is missing", "leave it out or give all three");
  }
  const double size = d.covariance.cwiseAbs().maxCoeff();
  const bool symmetric = (d.covariance - d.covariance.transpose()).cwiseAbs().maxCoeff() <= 1e-9 * size;
  if (!d.covariance.allFinite() || !symmetric || d.covariance.llt().info() != Eigen::Success) {
    throw InputError(place, "the covariance of m_b, s, c is not symmetric and positive definite",
                     "check its errors and covariance columns");
  }
}

void fill(double& value, double from) {
  if (!std::isfinite(value)) value = from;
}

CombinedDatum combine(std::span<const StandardisationDatum* const> rows) {
  CombinedDatum result;
  result.datum = *rows.front();
  if (rows.size() == 1) return result;
  Eigen::Matrix3d weight = Eigen::Matrix3d::Zero();
  Eigen::Vector3d weighted = Eigen::Vector3d::Zero();
  StandardisationDatum& mean = result.datum;
  for (const StandardisationDatum* row : rows) {
    const Eigen::Matrix3d w = row->covariance.inverse();
    weight += w;
    weighted += w * Eigen::Vector3d(row->m_b, row->s, row->c);
    for (const std::string& survey : row->surveys) {
      if (std::find(mean.surveys.begin(), mean.surveys.end(), survey) == mean.surveys.end())
        mean.surveys.push_back(survey);
    }
    if (!std::isfinite(mean.host_log_mass)) {
      mean.host_log_mass = row->host_log_mass;
      mean.host_log_mass_error = row->host_log_mass_error;
    }
    fill(mean.z_helio, row->z_helio);
    fill(mean.z_flow, row->z_flow);
    if (!std::isfinite(mean.modulus)) {
      mean.modulus = row->modulus;
      mean.flow_variance = row->flow_variance;
    }
  }
  mean.covariance = weight.inverse();
  mean.covariance = (0.5 * (mean.covariance + mean.covariance.transpose())).eval();
  const Eigen::Vector3d x = mean.covariance * weighted;
  mean.m_b = x[0];
  mean.s = x[1];
  mean.c = x[2];
  for (const StandardisationDatum* row : rows) {
    const Eigen::Vector3d r = Eigen::Vector3d(row->m_b, row->s, row->c) - x;
    result.disagreement_chi2 += r.dot(row->covariance.llt().solve(r));
  }
  result.disagreement_dof = 3 * (static_cast<int>(rows.size()) - 1);
  result.disagreement_probability = chi_square_survival(result.disagreement_chi2, result.disagreement_dof);
  return result;
}

}  // namespace

double flow_variance(double z_flow, double sigma_v, double z_error) {
  const double relative_velocity = sigma_v / (constants::speed_of_light_km_s * z_flow);
  const double relative_error = std::isfinite(z_error) ? z_error / z_flow : 0.0;
  const double per_ln = 5.0 / std::log(10.0);
  return per_ln * per_ln * (relative_velocity * relative_velocity + relative_error * relative_error);
}

std::vector<CombinedDatum> combine_surveys(std::span<const StandardisationDatum> rows) {
  std::map<std::string, std::size_t> place_of;
  std::vector<std::vector<const StandardisationDatum*>> groups;
  for (const StandardisationDatum& row : rows) {
    check_fit(row);
    const auto [it, is_new] = place_of.try_emplace(row.name, groups.size());
    if (is_new) groups.emplace_back();
    groups[it->second].push_back(&row);
  }
  std::vector<CombinedDatum> result;
  result.reserve(groups.size());
  for (const auto& group : groups) result.push_back(combine(group));
  return result;
}

void check_data(std::span<const StandardisationDatum> data) {
  std::set<std::string> names;
  for (const StandardisationDatum& d : data) {
    check_fit(d);
    const Place place{fmt::format("supernova {}", d.name), std::nullopt, ""};
    if (!std::isfinite(d.modulus) || !(d.flow_variance >= 0.0)) {
      throw InputError(place, "it has no distance modulus, or a negative variance of it",
                       "give it a redshift above zero");
    }
    if (!names.insert(d.name).second) {
      throw InputError(place, "it occurs twice", "combine its fits first, or rename one");
    }
  }
}

}  // namespace thirdrung
