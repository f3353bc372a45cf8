#include "report/residual_axes.h"

#include <algorithm>
#include <cmath>

#include "report/digits.h"

namespace thirdrung {
namespace {

using nlohmann::json;

/// Ticks of a logarithmic redshift axis, the round numbers within its range.
json redshift_ticks(const Range& range) {
  json ticks = json::array();
  for (const double decade : {0.001, 0.01, 0.1, 1.0}) {
    for (const double step : {1.0, 1.5, 2.0, 3.0, 5.0, 7.0}) {
      if (decade * step >= range.low && decade * step <= range.high) ticks.push_back(rounded(decade * step, 3));
    }
  }
  return ticks;
}

}  // namespace

bool has_residuals(const SupernovaRows& all) {
  return std::any_of(all.rows.begin(), all.rows.end(),
                     [](const SupernovaRow& row) { return row.used && std::isfinite(row.residual); });
}

Range residual_range(const SupernovaRows& all) {
  const Range range =
      range_of(used_values(all, &SupernovaRow::residual), used_values(all, &SupernovaRow::residual_error));
  const double largest = std::max(std::abs(range.low), std::abs(range.high));
  return {-largest, largest};
}

Direction redshift_axis(const SupernovaRows& all) {
  const auto z = used_values(all, &SupernovaRow::z_flow);
  double low = INFINITY, high = 0;
  for (const double value : z) {
    if (value > 0) low = std::min(low, value), high = std::max(high, value);
  }
  if (!(low < high)) low = 0.01, high = 0.1;
  const Range range{low / 1.06, high * 1.06};
  return {"redshift z (flow-corrected)", range, true, false, redshift_ticks(range), "~g"};
}

Direction residual_axis(const Range& range) {
  return {residual_title, range, false, true, nullptr, ".1f"};
}

}  // namespace thirdrung
