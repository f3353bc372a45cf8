#include "report/histogram.h"

#include <algorithm>
#include <cmath>

#include "base/constants.h"

namespace thirdrung {
namespace {

double gaussian(double x, double mean, double width) {
  return std::exp(-0.5 * (x - mean) * (x - mean) / (width * width)) / (width * std::sqrt(2 * constants::pi));
}

void choose_bins(std::vector<double> values, Histogram& histogram) {
  std::sort(values.begin(), values.end());
  const std::size_t n = values.size();
  const double spread = values[n * 3 / 4] - values[n / 4];
  const double span = values.back() - values.front();
  double step = std::max(2 * spread / std::cbrt(static_cast<double>(n)), span / 60);
  if (!(step > 0)) step = 1;
  const double decade = std::pow(10.0, std::floor(std::log10(step)));
  const double lead = step / decade;
  histogram.step = decade * (lead < 1.5 ? 1 : lead < 3.5 ? 2 : lead < 7.5 ? 5 : 10);
  histogram.low = std::floor(values.front() / histogram.step) * histogram.step;
  const auto count = static_cast<std::size_t>(std::floor((values.back() - histogram.low) / histogram.step)) + 1;
  histogram.counts.assign(count, 0.0);
  for (const double value : values) {
    const auto bin = static_cast<std::size_t>(std::max(0.0, (value - histogram.low) / histogram.step));
    histogram.counts[std::min(count - 1, bin)] += 1;
  }
}

}  // namespace

double Histogram::top() const {
  double result = counts.empty() ? 0 : *std::max_element(counts.begin(), counts.end());
  for (const double value : intrinsic) result = std::max(result, value);
  return result;
}

Histogram make_histogram(const SupernovaRows& all, double SupernovaRow::*member, double SupernovaRow::*error_member,
                         double mean, double width) {
  std::vector<double> values, errors;
  for (const SupernovaRow& row : all.rows) {
    if (!row.used || !std::isfinite(row.*member)) continue;
    values.push_back(row.*member);
    errors.push_back(error_member && std::isfinite(row.*error_member) ? row.*error_member : 0);
  }
  Histogram histogram;
  choose_bins(values, histogram);
  if (!std::isfinite(mean) || !(width > 0)) return histogram;
  for (int k = 0; k <= 160; ++k) {
    const double x = histogram.low + (histogram.high() - histogram.low) * k / 160.0;
    double seen = 0;
    for (const double error : errors) seen += gaussian(x, mean, std::hypot(width, error));
    histogram.x.push_back(x);
    histogram.intrinsic.push_back(static_cast<double>(values.size()) * gaussian(x, mean, width) * histogram.step);
    histogram.seen.push_back(seen * histogram.step);
  }
  return histogram;
}

}  // namespace thirdrung
