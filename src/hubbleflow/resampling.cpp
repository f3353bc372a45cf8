#include "hubbleflow/resampling.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <limits>

#include "hubbleflow/influence.h"
#include "standardisation/deviates.h"

namespace thirdrung {

namespace {

/// A row whose difference has no error of its own: resampling estimates the error of a_B, it is not another estimate of
/// it.
ScanRow row(const ScanFrame& frame, const std::string& scan, const std::string& setting, double a_b, double error) {
  return {scan,
          setting,
          {},
          static_cast<std::size_t>(std::count(frame.baseline().begin(), frame.baseline().end(), true)),
          a_b,
          error,
          a_b - frame.a_b(),
          std::numeric_limits<double>::quiet_NaN(),
          "the error is from the scatter between supernovae: errors common to all are not in it"};
}

}  // namespace

ScanRow jackknife_row(const ScanFrame& frame) {
  const std::vector<InfluenceRow> without = influence(frame);
  const auto n = static_cast<double>(without.size());
  double mean = 0.0;
  for (const InfluenceRow& r : without) mean += r.delta_ab / n;
  double sum = 0.0;
  for (const InfluenceRow& r : without) sum += (r.delta_ab - mean) * (r.delta_ab - mean);
  return row(frame, "jackknife", "each supernova left out in turn", frame.a_b() - (n - 1.0) * mean,
             std::sqrt((n - 1.0) / n * sum));
}

ScanRow bootstrap_row(const ScanFrame& frame, std::size_t draws, std::uint64_t seed) {
  const std::vector<Eigen::Index> in = places_of(frame.baseline());
  Deviates deviates(seed);
  double mean = 0.0;
  double square = 0.0;
  for (std::size_t d = 0; d < draws; ++d) {
    double weights = 0.0;
    double offset = 0.0;  // of y from a_B, for accuracy
    for (std::size_t k = 0; k < in.size(); ++k) {
      const Eigen::Index i = in[deviates.below(in.size())];
      const double w = frame.baseline_weights()[i];
      weights += w;
      offset += w * (frame.single_intercepts()[i] - frame.a_b());
    }
    const double delta = offset / weights;
    mean += delta / static_cast<double>(draws);
    square += delta * delta / static_cast<double>(draws);
  }
  return row(frame, "bootstrap", fmt::format("{} draws, seed {}", draws, seed), frame.a_b() + mean,
             std::sqrt(std::max(0.0, square - mean * mean)));
}

}  // namespace thirdrung
