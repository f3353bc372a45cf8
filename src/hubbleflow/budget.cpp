#include "hubbleflow/budget.h"

#include <algorithm>
#include <cmath>
#include <map>
#include <numbers>
#include <stdexcept>

namespace thirdrung {

namespace {

/// Fills everything from the variances: alone, and with correlations.
void fill(BudgetRow& row, double alone, double share) {
  row.ab_contribution = std::sqrt(std::max(alone, 0.0));
  row.mag_contribution = 5.0 * row.ab_contribution;
  row.h0_percent = 100.0 * std::numbers::ln10 * row.ab_contribution;
  row.variance_share = share;
  row.with_correlations = std::copysign(std::sqrt(std::abs(share)), share);
}

void sort_by_share(std::vector<BudgetRow>& rows) {
  std::stable_sort(rows.begin(), rows.end(),
                   [](const BudgetRow& a, const BudgetRow& b) { return a.variance_share > b.variance_share; });
}

}  // namespace

Budget make_budget(const CovarianceModel& model, const Eigen::VectorXd& w) {
  if (w.size() != static_cast<Eigen::Index>(model.supernovae.size()))
    throw std::logic_error("a budget needs one weight a supernova");
  Budget budget;
  double statistical = 0.0;
  for (const CovariancePart& part : model.parts) {
    double variance = 0.0;
    if (part.diagonal.size() > 0) variance += w.cwiseAbs2().dot(part.diagonal);
    if (part.matrix.size() > 0) variance += w.dot(part.matrix * w);
    variance *= 0.04;
    BudgetRow row{part.name, part.kind};
    fill(row, variance, variance);
    budget.rows.push_back(row);
    statistical += variance;
  }
  const auto count = static_cast<Eigen::Index>(model.systematics.size());
  Eigen::VectorXd q(count);
  for (Eigen::Index k = 0; k < count; ++k) q[k] = 0.2 * w.dot(model.systematics[static_cast<std::size_t>(k)].shift);
  const Eigen::MatrixXd rho =
      model.correlation.size() > 0 ? model.correlation : Eigen::MatrixXd(Eigen::MatrixXd::Identity(count, count));
  const Eigen::MatrixXd shared = q.asDiagonal() * rho * q.asDiagonal();
  std::map<std::string, std::vector<Eigen::Index>> kinds;
  double systematic = 0.0;
  for (Eigen::Index k = 0; k < count; ++k) {
    const SystematicShift& s = model.systematics[static_cast<std::size_t>(k)];
    BudgetRow row{s.name, s.kind, s.size, s.unit};
    fill(row, q[k] * q[k], shared.row(k).sum());
    budget.rows.push_back(row);
    systematic += row.variance_share;
    kinds[s.kind].push_back(k);
  }
  budget.by_kind.assign(budget.rows.begin(), budget.rows.begin() + static_cast<std::ptrdiff_t>(model.parts.size()));
  for (const auto& [kind, members] : kinds) {
    BudgetRow row{kind, kind};
    fill(row, shared(members, members).sum(), shared(members, Eigen::all).sum());
    budget.by_kind.push_back(row);
  }
  sort_by_share(budget.rows);
  sort_by_share(budget.by_kind);
  budget.error_stat = std::sqrt(statistical);
  budget.error_sys = std::sqrt(std::max(systematic, 0.0));
  budget.error = std::sqrt(statistical + systematic);
  return budget;
}

std::vector<InputDerivative> input_derivatives(const CovarianceModel& model, const Eigen::VectorXd& weights) {
  std::vector<InputDerivative> result;
  for (const SystematicShift& s : model.systematics) {
    // A fainter magnitude lowers a_B by a fifth of it.
    result.push_back({s.name, s.unit, s.size > 0.0 ? -0.2 * weights.dot(s.shift) / s.size : 0.0});
  }
  return result;
}

}  // namespace thirdrung
