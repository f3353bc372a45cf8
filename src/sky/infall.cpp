#include "sky/infall.h"

#include <algorithm>
#include <cmath>

#include "base/constants.h"

namespace thirdrung {
namespace {

using constants::degree;
using constants::speed_of_light_km_s;

Galactic galactic_from_b1950(double ra_hours, double dec) {
  const Equatorial icrs = icrs_from_b1950(15.0 * ra_hours, dec);
  return galactic_from_icrs(icrs.ra, icrs.dec);
}

bool contains(const Attractor& attractor, double v_helio, const Galactic& direction) {
  return v_helio > attractor.velocity_low && v_helio < attractor.velocity_high &&
         separation(attractor.centre.l, attractor.centre.b, direction.l, direction.b) < attractor.radius;
}

const Attractor* region_of(double v_helio, const Galactic& direction, std::span<const Attractor> attractors) {
  const auto found = std::find_if(attractors.begin(), attractors.end(),
                                  [&](const Attractor& a) { return contains(a, v_helio, direction); });
  return found == attractors.end() ? nullptr : &*found;
}

}  // namespace

std::vector<Attractor> published_attractors() {
  // Mould et al. 2000, Table A1: centre (B1950), V_LG, V_fid, radius, range. Written from memory and found equal to two
  // independent public transcriptions of the table; the paper itself was not at hand.
  return {{"Virgo", galactic_from_b1950(12.0 + 28.0 / 60.0 + 19.0 / 3600.0, 12.0 + 40.0 / 60.0), 957.0, 200.0, 10.0,
           600.0, 2300.0},
          {"Great Attractor", galactic_from_b1950(13.0 + 20.0 / 60.0, -44.0), 4380.0, 400.0, 10.0, 2600.0, 6600.0},
          {"Shapley", galactic_from_b1950(13.0 + 30.0 / 60.0, -31.0), 13600.0, 85.0, 12.0, 10000.0, 16000.0}};
}

double local_group_correction(const Galactic& direction) {
  const UnitVector n = unit_vector(direction.l, direction.b);
  return -79.0 * n[0] + 296.0 * n[1] - 36.0 * n[2];
}

double infall_correction(const Attractor& attractor, double v_local_group, const Galactic& direction,
                         const InfallOptions& options) {
  const double cos_theta =
      dot(unit_vector(attractor.centre.l, attractor.centre.b), unit_vector(direction.l, direction.b));
  const double v_a = attractor.velocity;
  const double along = v_local_group - v_a * cos_theta;
  const double r_squared = v_local_group * v_local_group + v_a * v_a - 2.0 * v_local_group * v_a * cos_theta;
  const double r = std::sqrt(std::max(0.0, r_squared));
  const double ours = options.strength * attractor.infall_at_us;
  // Within the region's radius: amplitude of its edge times r/edge, so that amplitude × along / r stays finite at the
  // centre.
  const double edge = v_a * std::sin(attractor.radius * degree);
  const double r_held = std::max(r, edge);
  const double amplitude_per_r = std::pow(r_held / v_a, 1.0 - options.slope) / r_held;
  return ours * cos_theta + ours * along * amplitude_per_r;
}

InfallResult infall_flow(double z_helio, const Galactic& direction, const SunMotion& sun,
                         const InfallOptions& options) {
  const double v_helio = speed_of_light_km_s * z_helio;
  InfallResult result;
  double correction = local_group_correction(direction);
  double v_local_group = v_helio + correction;
  double z_start = z_helio;
  Galactic at = direction;
  if (const Attractor* home = region_of(v_helio, direction, options.attractors)) {
    result.inside = home->name;
    if (options.region == AttractorRegion::at_centre) {
      v_local_group = home->velocity;
      z_start = v_local_group / speed_of_light_km_s;
      correction = 0.0;
      at = home->centre;
    }
  }
  for (const Attractor& attractor : options.attractors) {
    correction += infall_correction(attractor, v_local_group, at, options);
  }
  result.z_flow = (1.0 + z_start) * (1.0 + correction / speed_of_light_km_s) - 1.0;
  result.v_flow = speed_of_light_km_s * result.z_flow;
  result.v_pec = peculiar_velocity(z_cmb_from_helio(z_helio, direction, sun), result.z_flow);
  return result;
}

}  // namespace thirdrung
