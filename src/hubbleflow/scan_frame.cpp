#include "hubbleflow/scan_frame.h"

#include <fmt/format.h>

#include <Eigen/Cholesky>
#include <algorithm>
#include <cmath>
#include <limits>

#include "base/parallel.h"
#include "hubbleflow/look_elsewhere.h"

namespace thirdrung {

namespace {

constexpr double nothing = std::numeric_limits<double>::quiet_NaN();

std::size_t count(const std::vector<bool>& members) {
  return static_cast<std::size_t>(std::count(members.begin(), members.end(), true));
}

ScanRow row_without_result(const ScanFrame& frame, const std::string& scan, const NamedSubset& subset) {
  return {scan,
          subset.setting,
          subset.coordinates,
          count(subset.members),
          nothing,
          nothing,
          nothing,
          nothing,
          fmt::format("no result: fewer than {} supernovae are left", frame.options().fewest)};
}

}  // namespace

ScanFrame::ScanFrame(FlowSample sample, const InterceptOptions& options)
    : sample_(std::move(sample)), options_(options) {
  const InterceptResult baseline = fit_intercept(sample_, options_);
  if (baseline.q0) {
    options_.flow.expansion.q0 = *baseline.q0;
    options_.flow.expansion.omega_m = (*baseline.q0 + 1.0) / 1.5;
  }
  baseline_ = baseline.used;
  a_b_ = baseline.a_b;
  error_ = baseline.error;
  y_ = thirdrung::single_intercepts(sample_.supernovae, options_.flow);
  covariance_ = 0.04 * sample_.covariance;
  weighting_ = 0.04 * sample_.weighed_by();
  precision_ = 25.0 * precision_matrix(sample_.weighed_by(), sample_.supernovae);
  design_ = intercept_design(sample_.supernovae, options_);
  baseline_weights_ = Eigen::VectorXd::Zero(y_.size());
  baseline_weights_(places_of(baseline_)) = baseline.weights;
}

Eigen::VectorXd ScanFrame::weights(const std::vector<bool>& members) const {
  const std::vector<Eigen::Index> in = places_of(members);
  std::vector<bool> others = members;
  others.flip();
  const std::vector<Eigen::Index> out = places_of(others);
  const Eigen::MatrixXd a = design_(in, Eigen::all);
  Eigen::MatrixXd pa;  // (weighting_in,in)^-1 A
  if (in.size() <= out.size()) {
    pa = Eigen::LLT<Eigen::MatrixXd>(weighting_(in, in)).solve(a);
  } else {
    Eigen::MatrixXd padded = Eigen::MatrixXd::Zero(size(), design_.cols());
    padded(in, Eigen::all) = a;
    const Eigen::MatrixXd x = precision_ * padded;
    pa = x(in, Eigen::all);
    if (!out.empty()) {
      const Eigen::MatrixXd removed = Eigen::LLT<Eigen::MatrixXd>(precision_(out, out)).solve(x(out, Eigen::all));
      Eigen::MatrixXd only_out = Eigen::MatrixXd::Zero(size(), design_.cols());
      only_out(out, Eigen::all) = removed;
      pa -= (precision_ * only_out)(in, Eigen::all);
    }
  }
  const Eigen::MatrixXd normal = a.transpose() * pa;
  const Eigen::MatrixXd all = normal.ldlt().solve(pa.transpose());
  Eigen::VectorXd result = Eigen::VectorXd::Zero(size());
  result(in) = all.row(0).transpose();
  return result;
}

double ScanFrame::error_of(const Eigen::VectorXd& combination) const {
  return std::sqrt(std::max(0.0, combination.dot(covariance_ * combination)));
}

namespace {

std::vector<ScanRow> compared(const ScanFrame& frame, const std::string& scan, const std::vector<NamedSubset>& subsets,
                              const std::vector<bool>& baseline, const Eigen::VectorXd& baseline_weights, int threads) {
  std::vector<ScanRow> rows(subsets.size());
  Eigen::MatrixXd differences = Eigen::MatrixXd::Zero(frame.size(), static_cast<Eigen::Index>(subsets.size()));
  parallel_for(subsets.size(), threads, [&](std::size_t k) {
    const NamedSubset& subset = subsets[k];
    const std::size_t members = count(subset.members);
    if (members < frame.options().fewest) {
      rows[k] = row_without_result(frame, scan, subset);
      return;
    }
    const bool same = subset.members == baseline;
    const Eigen::VectorXd w = same ? baseline_weights : frame.weights(subset.members);
    const Eigen::VectorXd difference = w - baseline_weights;
    differences.col(static_cast<Eigen::Index>(k)) = difference;
    rows[k] = {scan,
               subset.setting,
               subset.coordinates,
               members,
               frame.estimate(w),
               frame.error_of(w),
               same ? 0.0 : frame.estimate(difference),
               same ? 0.0 : frame.error_of(difference),
               ""};
  });
  add_look_elsewhere_caution(rows, differences.transpose() * frame.covariance() * differences);
  return rows;
}

}  // namespace

std::vector<ScanRow> scan_subsets(const ScanFrame& frame, const std::string& scan,
                                  const std::vector<NamedSubset>& subsets, int threads) {
  return compared(frame, scan, subsets, frame.baseline(), frame.baseline_weights(), threads);
}

std::vector<ScanRow> scan_subsets_against(const ScanFrame& frame, const std::vector<bool>& baseline,
                                          const std::string& scan, const std::vector<NamedSubset>& subsets,
                                          int threads) {
  return compared(frame, scan, subsets, baseline, frame.weights(baseline), threads);
}

ScanRow difference_of(const ScanFrame& frame, const std::string& scan, const std::string& setting,
                      const std::vector<bool>& first, const std::vector<bool>& second) {
  std::vector<bool> both = first;
  for (std::size_t i = 0; i < both.size(); ++i) both[i] = both[i] || second[i];
  if (std::min(count(first), count(second)) < frame.options().fewest)
    return row_without_result(frame, scan, {setting, {}, both});
  const Eigen::VectorXd difference = frame.weights(first) - frame.weights(second);
  return {scan, setting, {}, count(both), nothing, nothing, frame.estimate(difference), frame.error_of(difference), ""};
}

}  // namespace thirdrung
