#include "hubbleflow/variation.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <limits>
#include <stdexcept>

namespace thirdrung {

ScanRow scan_variation(const ScanFrame& frame, const Variation& v) {
  const auto n = static_cast<std::size_t>(frame.size());
  if (v.supernovae.size() != n) throw std::logic_error("a variation needs every supernova of the sample");
  const std::vector<bool> members = in_redshift_range(v.supernovae, frame.options().z_min, frame.options().z_max);
  ScanRow row{v.scan, v.setting, {}, static_cast<std::size_t>(std::count(members.begin(), members.end(), true)), 0, 0,
              0,      0,         ""};
  if (row.supernovae < frame.options().fewest) {
    row.a_b = row.a_b_error = row.delta_ab = row.delta_ab_error = std::numeric_limits<double>::quiet_NaN();
    row.caution = fmt::format("no result: fewer than {} supernovae are left", frame.options().fewest);
    return row;
  }
  const Eigen::VectorXd w = members == frame.baseline() ? frame.baseline_weights() : frame.weights(members);
  const Eigen::VectorXd difference = w - frame.baseline_weights();
  const Eigen::VectorXd y = single_intercepts(v.supernovae, v.flow);
  double own = std::pow(frame.error_of(w), 2);
  double change = std::pow(frame.error_of(difference), 2);
  if (v.change_variance.size() > 0) {
    const double spread = 0.04 * w.cwiseAbs2().dot(v.change_variance);
    own += spread + 2.0 * 0.04 * w.cwiseAbs2().dot(v.change_covariance);
    change += spread + 2.0 * 0.04 * difference.cwiseProduct(w).dot(v.change_covariance);
  }
  row.a_b = w.dot(y);
  row.a_b_error = std::sqrt(std::max(own, 0.0));
  row.delta_ab = row.a_b - frame.a_b();
  row.delta_ab_error = std::sqrt(std::max(change, 0.0));
  return row;
}

void estimate_change_variance(const ScanFrame& frame, Variation& v) {
  const auto in = places_of(frame.baseline());
  const Eigen::VectorXd change = -5.0 * (single_intercepts(v.supernovae, v.flow) - frame.single_intercepts());
  v.change_variance = (change.array() - change(in).mean()).square();
  v.change_covariance = Eigen::VectorXd::Zero(frame.size());
}

Variation without_correction(const ScanFrame& frame, std::span<const StandardisationDatum> data,
                             const StandardisationCoefficients& k, const HostMassOptions& host_mass, Correction which) {
  const auto n = frame.size();
  if (static_cast<Eigen::Index>(data.size()) != n) throw std::logic_error("one datum a supernova is needed");
  Variation v;
  v.scan = "corrections";
  v.setting = which == Correction::stretch  ? "without stretch"
              : which == Correction::colour ? "without colour"
                                            : "without host mass";
  v.supernovae = frame.sample().supernovae;
  v.flow = frame.options().flow;
  v.change_variance = Eigen::VectorXd::Zero(n);
  v.change_covariance = Eigen::VectorXd::Zero(n);
  const Eigen::Vector3d magnitude(1.0, k.alpha, -k.beta);
  Eigen::Vector3d term = Eigen::Vector3d::Zero();  // the term as a combination of (m_b, s, c)
  if (which == Correction::stretch) term[1] = k.alpha;
  if (which == Correction::colour) term[2] = -k.beta;
  Eigen::VectorXd change(n);
  double mean = 0.0;
  double members = 0.0;
  for (Eigen::Index i = 0; i < n; ++i) {
    const StandardisationDatum& d = data[static_cast<std::size_t>(i)];
    if (d.name != v.supernovae[static_cast<std::size_t>(i)].name)
      throw std::logic_error("data in another order than the sample");
    const double p = host_mass_probability(d.host_log_mass, d.host_log_mass_error, host_mass);
    change[i] = which == Correction::stretch  ? -k.alpha * (d.s - 1.0)
                : which == Correction::colour ? k.beta * d.c
                                              : -k.gamma * (p - 0.5);
    v.supernovae[static_cast<std::size_t>(i)].m_b_standardised += change[i];
    v.change_covariance[i] = -term.dot(d.covariance * magnitude);
    if (frame.baseline()[static_cast<std::size_t>(i)]) {
      mean += change[i];
      members += 1.0;
    }
  }
  mean /= members;
  double spread = 0.0;
  for (const Eigen::Index i : places_of(frame.baseline()))
    spread += (change[i] - mean) * (change[i] - mean) / (members - 1.0);
  v.change_variance.setConstant(spread);
  return v;
}

}  // namespace thirdrung
