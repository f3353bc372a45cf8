#include "hubbleflow/look_elsewhere.h"

#include <fmt/format.h>

#include <Eigen/Eigenvalues>
#include <algorithm>
#include <cmath>

#include "hubbleflow/scan_frame.h"
#include "standardisation/deviates.h"

namespace thirdrung {

double probability_of_extreme(const Eigen::MatrixXd& covariance, double largest, std::size_t draws,
                              std::uint64_t seed) {
  std::vector<Eigen::Index> live;
  const double biggest = covariance.size() > 0 ? covariance.diagonal().maxCoeff() : 0.0;
  for (Eigen::Index k = 0; k < covariance.rows(); ++k) {
    if (covariance(k, k) > 1e-20 * biggest && covariance(k, k) > 0.0) live.push_back(k);
  }
  if (live.empty()) return 1.0;
  const Eigen::VectorXd scale = covariance.diagonal()(live).cwiseSqrt().cwiseInverse();
  const Eigen::MatrixXd correlation = scale.asDiagonal() * covariance(live, live) * scale.asDiagonal();
  const Eigen::SelfAdjointEigenSolver<Eigen::MatrixXd> principal(correlation);
  const Eigen::VectorXd size = principal.eigenvalues().cwiseMax(0.0).cwiseSqrt();
  const Eigen::MatrixXd root = principal.eigenvectors() * size.asDiagonal();
  Deviates deviates(seed);
  std::size_t as_large = 0;
  Eigen::VectorXd normal(root.cols());
  for (std::size_t i = 0; i < draws; ++i) {
    for (Eigen::Index k = 0; k < normal.size(); ++k) normal[k] = deviates.normal();
    if ((root * normal).cwiseAbs().maxCoeff() >= largest) ++as_large;
  }
  return static_cast<double>(as_large) / static_cast<double>(draws);
}

void add_look_elsewhere_caution(std::span<ScanRow> rows, const Eigen::MatrixXd& covariance) {
  double largest = 0.0;
  ScanRow* extreme = nullptr;
  std::size_t settings = 0;
  for (ScanRow& row : rows) {
    if (!(row.delta_ab_error > 0.0)) continue;
    ++settings;
    const double pull = std::abs(row.delta_ab) / row.delta_ab_error;
    if (pull > largest) {
      largest = pull;
      extreme = &row;
    }
  }
  if (settings < 2 || largest < 1.5) return;
  constexpr std::size_t draws = 10000;
  const double chance = probability_of_extreme(covariance, largest, draws);
  const double resolution = 10.0 / static_cast<double>(draws);
  const std::string how_often = chance < resolution ? fmt::format("fewer than {:.1f}%", 100.0 * resolution)
                                                    : fmt::format("{:.2g}%", 100.0 * chance);
  extreme->caution += fmt::format(
      "{}most extreme of {} correlated settings: chance alone reaches {:.1f} errors somewhere in {} of such scans",
      extreme->caution.empty() ? "" : "; ", settings, largest, how_often);
}

}  // namespace thirdrung
