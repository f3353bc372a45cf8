#include "standardisation/selection.h"

#include <fmt/format.h>

#include <cmath>
#include <numbers>

#include "base/error.h"

namespace thirdrung {

namespace {

/// phi(t) / Phi(t).
double normal_hazard(double t) {
  // Far below the limit both vanish: their ratio by its asymptotic series, good to 1e-6 there.
  if (t < -10.0) {
    const double s = 1.0 / (t * t);
    return -t * (1.0 + s * (1.0 - s * (2.0 - 10.0 * s)));
  }
  return std::sqrt(2.0 / std::numbers::pi) * std::exp(-0.5 * t * t) / std::erfc(-t / std::numbers::sqrt2);
}

/// What decides about one supernova; no limit: nothing is known to have been lost.
struct Chance {
  double scatter = 0.0, blur = 0.0, margin = 0.0;
  bool limited = false;
};

const MagnitudeLimit* faintest(const std::vector<std::string>& surveys, const MagnitudeLimits& limits) {
  const MagnitudeLimit* out = nullptr;
  for (const std::string& survey : surveys) {
    const auto found = limits.find(survey);
    if (found == limits.end()) return nullptr;
    if (out == nullptr || found->second.m_b > out->m_b) out = &found->second;
  }
  return out;
}

Chance chance_of(const StandardisationDatum& d, const StandardisationCoefficients& k, const HostMassOptions& host_mass,
                 const MagnitudeLimits& limits) {
  const MagnitudeLimit* limit = faintest(d.surveys, limits);
  if (limit == nullptr) return {};
  const double p = host_mass_probability(d.host_log_mass, d.host_log_mass_error, host_mass);
  const Eigen::Vector3d by_s_and_c(0.0, k.alpha, -k.beta);
  Chance out;
  out.limited = true;
  out.scatter = k.sigma_int * k.sigma_int + k.lost_variance + k.gamma * k.gamma * p * (1.0 - p) + d.flow_variance;
  out.blur = limit->width * limit->width + by_s_and_c.dot(d.covariance * by_s_and_c);
  out.margin = limit->m_b - (d.modulus + k.intercept - k.alpha * (d.s - 1.0) + k.beta * d.c - k.gamma * (p - 0.5));
  return out;
}

/// Data with the biases taken off.
std::vector<StandardisationDatum> corrected(std::span<const StandardisationDatum> data, const Eigen::VectorXd& bias) {
  std::vector<StandardisationDatum> out(data.begin(), data.end());
  for (std::size_t i = 0; i < out.size(); ++i) out[i].m_b -= bias[static_cast<Eigen::Index>(i)];
  return out;
}

/// Mean loss of variance, each supernova with the inverse square of its variance about the relation.
double mean_loss(std::span<const StandardisationDatum> data, const StandardisationCoefficients& k,
                 const HostMassOptions& host_mass, const MagnitudeLimits& limits) {
  const Eigen::Vector3d a(1.0, k.alpha, -k.beta);
  double sum = 0.0, weights = 0.0;
  for (const StandardisationDatum& d : data) {
    const Chance chance = chance_of(d, k, host_mass, limits);
    const double variance = a.dot(d.covariance * a) + k.sigma_int * k.sigma_int + d.flow_variance;
    const double weight = 1.0 / (variance * variance);
    weights += weight;
    if (chance.limited) sum += weight * selection_variance_loss(chance.scatter, chance.blur, chance.margin);
  }
  return sum / weights;
}

/// Supernovae that their survey can hardly have found.
std::size_t beyond_the_limit(std::span<const StandardisationDatum> data, const StandardisationCoefficients& k,
                             const HostMassOptions& host_mass, const MagnitudeLimits& limits) {
  constexpr double far = -3.0;
  std::size_t count = 0;
  for (const StandardisationDatum& d : data) {
    const Chance chance = chance_of(d, k, host_mass, limits);
    if (chance.limited && chance.margin < far * std::sqrt(chance.scatter + chance.blur)) ++count;
  }
  return count;
}

}  // namespace

double selection_bias(double scatter, double blur, double margin) {
  if (scatter <= 0.0) return 0.0;
  const double whole = std::sqrt(scatter + blur);
  return -scatter / whole * normal_hazard(margin / whole);
}

double selection_variance_loss(double scatter, double blur, double margin) {
  if (scatter <= 0.0) return 0.0;
  const double whole = scatter + blur, t = margin / std::sqrt(whole), h = normal_hazard(t);
  return scatter * scatter / whole * h * (h + t);
}

Eigen::VectorXd selection_biases(std::span<const StandardisationDatum> data, const StandardisationCoefficients& k,
                                 const HostMassOptions& host_mass, const MagnitudeLimits& limits) {
  Eigen::VectorXd out(static_cast<Eigen::Index>(data.size()));
  for (std::size_t i = 0; i < data.size(); ++i) {
    const Chance chance = chance_of(data[i], k, host_mass, limits);
    out[static_cast<Eigen::Index>(i)] =
        chance.limited ? selection_bias(chance.scatter, chance.blur, chance.margin) : 0.0;
  }
  return out;
}

std::vector<StandardisedMagnitude> standardise_selected(std::span<const StandardisationDatum> data,
                                                        const StandardisationCoefficients& k,
                                                        const HostMassOptions& host_mass,
                                                        const MagnitudeLimits& limits) {
  if (limits.empty()) return standardise(data, k, host_mass);
  const Eigen::VectorXd bias = selection_biases(data, k, host_mass, limits);
  auto out = standardise(corrected(data, bias), k, host_mass);
  for (std::size_t i = 0; i < out.size(); ++i) out[i].selection_bias = bias[static_cast<Eigen::Index>(i)];
  return out;
}

StandardisationResult fit_selected(std::span<const StandardisationDatum> data, const HostMassOptions& host_mass,
                                   const MagnitudeLimits& limits, const StandardisationFit& fit) {
  constexpr int most_rounds = 100;
  constexpr double settled = 1e-7;
  StandardisationResult result = fit(data);
  Eigen::VectorXd bias = Eigen::VectorXd::Zero(static_cast<Eigen::Index>(data.size()));
  double lost = 0.0;
  for (int round = 0; round < most_rounds; ++round) {
    result.lost_variance = lost;
    lost = mean_loss(data, coefficients(result), host_mass, limits);
    result.lost_variance = lost;
    const Eigen::VectorXd anew = selection_biases(data, coefficients(result), host_mass, limits);
    const double moved = (anew - bias).cwiseAbs().maxCoeff();
    if (moved < settled) {
      if (const std::size_t count = beyond_the_limit(data, coefficients(result), host_mass, limits); count > 0) {
        result.remarks.push_back(
            fmt::format("{} of {} supernovae should be fainter than their survey's magnitude limit by more than three "
                        "times the scatter: the limit is too bright, or too sharp.",
                        count, data.size()));
      }
      return result;
    }
    bias = anew;
    result = fit(corrected(data, bias));
  }
  throw NoResultError("the correction for selection did not settle; check magnitude_limit and width of [[selection]].");
}

}  // namespace thirdrung
