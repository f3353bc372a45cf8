#include "report/trend.h"

#include <algorithm>
#include <cmath>
#include <limits>

namespace thirdrung {
namespace {

struct Point {
  double x, y, weight;
};

std::vector<Point> sound_points(std::span<const double> x, std::span<const double> y, std::span<const double> y_error) {
  std::vector<Point> points;
  for (std::size_t i = 0; i < x.size(); ++i) {
    if (std::isfinite(x[i]) && std::isfinite(y[i]) && std::isfinite(y_error[i]) && y_error[i] > 0) {
      points.push_back({x[i], y[i], 1.0 / (y_error[i] * y_error[i])});
    }
  }
  return points;
}

}  // namespace

Trend fit_trend(std::span<const double> x, std::span<const double> y, std::span<const double> y_error) {
  const auto points = sound_points(x, y, y_error);
  Trend trend;
  trend.points = points.size();
  double sum = 0;
  for (const Point& p : points) {
    sum += p.weight;
    trend.pivot += p.weight * p.x;
    trend.value_at_pivot += p.weight * p.y;
  }
  trend.pivot /= sum;
  trend.value_at_pivot /= sum;
  double xx = 0, xy = 0;
  for (const Point& p : points) {
    const double dx = p.x - trend.pivot;
    xx += p.weight * dx * dx;
    xy += p.weight * dx * (p.y - trend.value_at_pivot);
  }
  const bool determined = points.size() >= 3 && xx > 0;
  trend.slope = determined ? xy / xx : std::numeric_limits<double>::quiet_NaN();
  trend.slope_error = determined ? 1.0 / std::sqrt(xx) : std::numeric_limits<double>::quiet_NaN();
  return trend;
}

double slope_of_shared_errors(std::span<const double> x, std::span<const double> y_error,
                              std::span<const double> covariance) {
  // The covariances stand in the place of y, so that unsound points drop out alike.
  const auto points = sound_points(x, covariance, y_error);
  double sum = 0, mean = 0, shared = 0, spread = 0;
  for (const Point& p : points) sum += p.weight, mean += p.weight * p.x;
  mean /= sum;
  for (const Point& p : points) {
    shared += p.weight * p.y;
    spread += p.weight * (p.x - mean) * (p.x - mean);
  }
  return spread > 0 ? shared / spread : 0;
}

std::vector<BinnedMean> binned_means(std::span<const double> x, std::span<const double> y,
                                     std::span<const double> y_error, std::size_t bins) {
  auto points = sound_points(x, y, y_error);
  if (points.size() < 10 || bins == 0) return {};
  std::stable_sort(points.begin(), points.end(), [](const Point& a, const Point& b) { return a.x < b.x; });
  const std::size_t count = std::min(bins, points.size() / 5);
  std::vector<BinnedMean> result;
  for (std::size_t k = 0; k < count; ++k) {
    const std::size_t from = k * points.size() / count, to = (k + 1) * points.size() / count;
    BinnedMean bin;
    bin.low = points[from].x;
    bin.high = points[to - 1].x;
    bin.points = to - from;
    double sum = 0;
    for (std::size_t i = from; i < to; ++i) {
      sum += points[i].weight;
      bin.x += points[i].weight * points[i].x;
      bin.mean += points[i].weight * points[i].y;
    }
    bin.x /= sum;
    bin.mean /= sum;
    bin.error = 1.0 / std::sqrt(sum);
    result.push_back(bin);
  }
  return result;
}

}  // namespace thirdrung
