#include "hubbleflow/flow_sample.h"

#include <fmt/format.h>

#include <Eigen/Cholesky>
#include <Eigen/Eigenvalues>
#include <cmath>
#include <map>
#include <numbers>
#include <set>

#include "base/error.h"

namespace thirdrung {

namespace {

Place of_supernova(const FlowSupernova& s) {
  return {fmt::format("supernova {}", s.name), std::nullopt, ""};
}

void check_covariance(const Eigen::MatrixXd& c, std::span<const FlowSupernova> supernovae) {
  const Place place{"covariance", std::nullopt, ""};
  const auto n = static_cast<Eigen::Index>(supernovae.size());
  if (c.rows() != n || c.cols() != n) {
    throw InputError(place, fmt::format("it is {} by {} for {} supernovae", c.rows(), c.cols(), n),
                     "give one row and column a supernova, in the sample's order");
  }
  const auto name = [&](Eigen::Index i) { return supernovae[static_cast<std::size_t>(i)].name; };
  const double tolerance = 1e-8 * c.cwiseAbs().maxCoeff();
  for (Eigen::Index j = 0; j < n; ++j) {
    if (!(c(j, j) > 0.0)) {
      throw InputError(place, fmt::format("the variance of {} is {}", name(j), c(j, j)),
                       "every variance must be positive");
    }
    for (Eigen::Index i = 0; i < j; ++i) {
      if (!(std::abs(c(i, j) - c(j, i)) <= tolerance)) {
        throw InputError(
            place,
            fmt::format("it is not symmetric: {} for {} and {}, {} the other way", c(i, j), name(i), name(j), c(j, i)),
            "check how the matrix was written");
      }
    }
  }
}

}  // namespace

Eigen::VectorXd single_intercepts(std::span<const FlowSupernova> supernovae, const FlowOptions& options) {
  Eigen::VectorXd y(static_cast<Eigen::Index>(supernovae.size()));
  for (std::size_t i = 0; i < supernovae.size(); ++i) {
    const FlowSupernova& s = supernovae[i];
    double term = log_expansion_term(s.z_flow, options.expansion);
    if (options.helio_factor && std::isfinite(s.z_helio)) term += std::log10((1.0 + s.z_helio) / (1.0 + s.z_flow));
    y[static_cast<Eigen::Index>(i)] = term - 0.2 * s.m_b_standardised;
  }
  return y;
}

double velocity_response(double z_flow, const Expansion& expansion) {
  return (1.0 + z_flow) * log_expansion_slope(z_flow, expansion) - 2.0 / std::numbers::ln10;
}

void check_flow_sample(const FlowSample& sample) {
  std::set<std::string> names;
  for (const FlowSupernova& s : sample.supernovae) {
    if (!(s.z_flow > 0.0))
      throw InputError(of_supernova(s), fmt::format("z_flow is {}", s.z_flow), "give a positive redshift");
    if (!std::isfinite(s.m_b_standardised)) {
      throw InputError(of_supernova(s), "it has no standardised magnitude", "give one or leave the supernova out");
    }
    if (!names.insert(s.name).second) {
      throw InputError(of_supernova(s), "it occurs twice in the Hubble flow",
                       "combine its measurements, or rename one");
    }
  }
  check_covariance(sample.covariance, sample.supernovae);
  if (sample.weighting.size() > 0) check_covariance(sample.weighting, sample.supernovae);
}

Eigen::MatrixXd precision_matrix(const Eigen::MatrixXd& covariance, std::span<const FlowSupernova> supernovae) {
  const Eigen::LLT<Eigen::MatrixXd> cholesky(covariance);
  if (cholesky.info() == Eigen::Success) {
    return cholesky.solve(Eigen::MatrixXd::Identity(covariance.rows(), covariance.cols()));
  }
  const Eigen::SelfAdjointEigenSolver<Eigen::MatrixXd> eigen(covariance);
  Eigen::Index worst = 0;
  eigen.eigenvectors().col(0).cwiseAbs().maxCoeff(&worst);
  throw InputError(
      {"covariance", std::nullopt, ""},
      fmt::format(
          "it is not positive definite: its smallest eigenvalue is {:.3g}, in a combination that {} weighs most in",
          eigen.eigenvalues()[0], supernovae[static_cast<std::size_t>(worst)].name),
      "look for a repeated supernova, or covariances larger than the variances allow");
}

std::vector<bool> in_redshift_range(std::span<const FlowSupernova> supernovae, double z_min, double z_max) {
  std::vector<bool> members;
  members.reserve(supernovae.size());
  for (const FlowSupernova& s : supernovae) members.push_back(s.z_flow > z_min && s.z_flow < z_max);
  return members;
}

std::vector<Eigen::Index> places_of(const std::vector<bool>& members) {
  std::vector<Eigen::Index> places;
  for (std::size_t i = 0; i < members.size(); ++i) {
    if (members[i]) places.push_back(static_cast<Eigen::Index>(i));
  }
  return places;
}

FlowSample cut(const FlowSample& sample, const std::vector<bool>& members) {
  const std::vector<Eigen::Index> places = places_of(members);
  FlowSample result;
  for (const Eigen::Index i : places) result.supernovae.push_back(sample.supernovae[static_cast<std::size_t>(i)]);
  result.covariance = sample.covariance(places, places);
  if (sample.weighting.size() > 0) result.weighting = sample.weighting(places, places);
  return result;
}

Eigen::MatrixXd in_order_of(std::span<const FlowSupernova> supernovae, std::span<const std::string> ids,
                            const Eigen::MatrixXd& covariance, const std::string& file) {
  std::map<std::string, Eigen::Index> place_of;
  for (std::size_t i = 0; i < ids.size(); ++i) place_of.emplace(ids[i], static_cast<Eigen::Index>(i));
  if (covariance.rows() != covariance.cols() || covariance.rows() != static_cast<Eigen::Index>(ids.size())) {
    throw InputError(
        {file, std::nullopt, ""},
        fmt::format("the covariance is {} by {} for {} supernovae", covariance.rows(), covariance.cols(), ids.size()),
        "give one row and column an id");
  }
  std::vector<Eigen::Index> places;
  std::string missing;
  std::size_t absent = 0;
  for (const FlowSupernova& s : supernovae) {
    const auto it = place_of.find(s.name);
    if (it != place_of.end()) {
      places.push_back(it->second);
      continue;
    }
    ++absent;
    if (absent <= 5) missing += (missing.empty() ? "" : ", ") + s.name;
  }
  if (absent > 0) {
    throw InputError({file, std::nullopt, ""},
                     fmt::format("the covariance lacks {} of the sample's supernovae ({}{})", absent, missing,
                                 absent > 5 ? ", ..." : ""),
                     "add them, or leave them out of the sample");
  }
  return covariance(places, places);
}

}  // namespace thirdrung
