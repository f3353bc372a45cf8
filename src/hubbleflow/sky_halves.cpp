#include "hubbleflow/sky_halves.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <limits>

#include "base/constants.h"
#include "base/error.h"
#include "base/parallel.h"
#include "hubbleflow/look_elsewhere.h"
#include "sky/position.h"

namespace thirdrung {

namespace {

constexpr double nothing = std::numeric_limits<double>::quiet_NaN();

/// Evenly spread directions with dec > 0: equal steps in sin(dec), turned by the golden angle.
std::vector<SkyHalf> spiral(std::size_t count) {
  std::vector<SkyHalf> poles(count);
  const double golden_angle = 180.0 * (3.0 - std::sqrt(5.0));
  for (std::size_t k = 0; k < count; ++k) {
    SkyHalf& p = poles[k];
    p.ra = std::fmod(static_cast<double>(k) * golden_angle, 360.0);
    p.dec = std::asin((static_cast<double>(k) + 0.5) / static_cast<double>(count)) / constants::degree;
    const Galactic g = galactic_from_icrs(p.ra, p.dec);
    p.l = g.l;
    p.b = g.b;
  }
  return poles;
}

std::vector<UnitVector> directions(const ScanFrame& frame) {
  std::vector<UnitVector> result;
  for (std::size_t i = 0; i < frame.baseline().size(); ++i) {
    const FlowSupernova& s = frame.sample().supernovae[i];
    if (!frame.baseline()[i]) {
      result.push_back({0.0, 0.0, 0.0});
      continue;
    }
    if (!is_direction(s.ra, s.dec)) {
      throw InputError({fmt::format("supernova {}", s.name), std::nullopt, ""}, "it has no position",
                       "the scan of sky halves needs ra and dec of all");
    }
    result.push_back(unit_vector(s.ra, s.dec));
  }
  return result;
}

}  // namespace

SkyHalvesMap sky_halves(const ScanFrame& frame, std::size_t count, int threads) {
  SkyHalvesMap map;
  map.poles = spiral(count);
  const std::vector<UnitVector> towards = directions(frame);
  Eigen::MatrixXd differences = Eigen::MatrixXd::Zero(frame.size(), static_cast<Eigen::Index>(count));
  parallel_for(count, threads, [&](std::size_t k) {
    SkyHalf& pole = map.poles[k];
    const UnitVector axis = unit_vector(pole.ra, pole.dec);
    std::vector<bool> near = frame.baseline();
    std::vector<bool> far = frame.baseline();
    for (std::size_t i = 0; i < near.size(); ++i) {
      if (!near[i]) continue;
      const bool is_near = dot(axis, towards[i]) > 0.0;
      near[i] = is_near;
      far[i] = !is_near;
    }
    pole.near = static_cast<std::size_t>(std::count(near.begin(), near.end(), true));
    pole.far = static_cast<std::size_t>(std::count(far.begin(), far.end(), true));
    pole.difference = pole.error = nothing;
    if (std::min(pole.near, pole.far) < frame.options().fewest) return;
    const Eigen::VectorXd d = frame.weights(near) - frame.weights(far);
    differences.col(static_cast<Eigen::Index>(k)) = d;
    pole.difference = frame.estimate(d);
    pole.error = frame.error_of(d);
  });
  for (std::size_t k = 0; k < count; ++k) {
    const double pull = std::abs(map.poles[k].difference) / map.poles[k].error;
    if (pull > map.largest_pull) {
      map.largest_pull = pull;
      map.largest = k;
    }
  }
  if (map.largest_pull > 0.0) {
    map.chance = probability_of_extreme(differences.transpose() * frame.covariance() * differences, map.largest_pull);
  }
  return map;
}

std::vector<ScanRow> sky_halves_rows(const ScanFrame&, const SkyHalvesMap& map) {
  std::vector<ScanRow> rows;
  for (std::size_t k = 0; k < map.poles.size(); ++k) {
    const SkyHalf& p = map.poles[k];
    ScanRow row{"sky_halves",
                fmt::format("half about l = {:.0f}, b = {:.0f} minus the other ({} and {})", p.l, p.b, p.near, p.far),
                {p.ra, p.dec},
                p.near + p.far,
                nothing,
                nothing,
                p.difference,
                p.error,
                ""};
    if (std::isnan(p.difference)) row.caution = "no result: one half has too few supernovae";
    if (k == map.largest && map.largest_pull > 0.0) {
      row.caution = fmt::format(
          "most extreme of {} correlated poles: chance alone reaches {:.1f} errors somewhere in {:.2g}% of such maps",
          map.poles.size(), map.largest_pull, 100.0 * map.chance);
    }
    rows.push_back(std::move(row));
  }
  return rows;
}

}  // namespace thirdrung
