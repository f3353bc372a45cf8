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

double cos_angle(const Attractor& attractor, const Galactic& direction) {
  return dot(unit_vector(attractor.centre.l, attractor.centre.b), unit_vector(direction.l, direction.b));
}

// The published sum; a galaxy in an attractor's region (`home`) is put at that attractor's centre and velocity.
double published_z_flow(double v_helio, const Galactic& direction, const Attractor* home,
                        const InfallOptions& options) {
  const Galactic at = home != nullptr ? home->centre : direction;
  const double to_local_group = home != nullptr ? 0.0 : local_group_correction(direction);
  const double v_start = home != nullptr ? home->velocity : v_helio;
  const double v_local_group = v_start + to_local_group;
  double correction = to_local_group;
  for (const Attractor& a : options.attractors) {
    correction += our_infall(a, at, options) + galaxy_infall(a, v_local_group, at, options);
  }
  return (1.0 + v_start / speed_of_light_km_s) * (1.0 + correction / speed_of_light_km_s) - 1.0;
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

double our_infall(const Attractor& attractor, const Galactic& direction, const InfallOptions& options) {
  return options.strength * attractor.infall_at_us * cos_angle(attractor, direction);
}

double galaxy_infall(const Attractor& attractor, double v_local_group, const Galactic& direction,
                     const InfallOptions& options) {
  const double cos_theta = cos_angle(attractor, direction);
  const double v_a = attractor.velocity;
  const double along = v_local_group - v_a * cos_theta;
  const double r_squared = v_local_group * v_local_group + v_a * v_a - 2.0 * v_local_group * v_a * cos_theta;
  const double r = std::sqrt(std::max(0.0, r_squared));
  // Within the region's radius: the amplitude at its edge times r/edge, so that amplitude × along / r stays finite.
  const double r_held = std::max(r, v_a * std::sin(attractor.radius * degree));
  const double amplitude_over_r = std::pow(r_held / v_a, 1.0 - options.slope) / r_held;
  return options.strength * attractor.infall_at_us * along * amplitude_over_r;
}

InfallResult infall_flow(double z_helio, const Galactic& direction, const SunMotion& sun,
                         const InfallOptions& options) {
  const double v_helio = speed_of_light_km_s * z_helio;
  const double z_cmb = z_cmb_from_helio(z_helio, direction, sun);
  const Attractor* home = region_of(v_helio, direction, options.attractors);
  InfallResult result;
  if (home != nullptr) result.inside = home->name;
  if (options.scheme == InfallScheme::as_published) {
    result.z_flow = published_z_flow(v_helio, direction, home, options);
    result.v_pec = peculiar_velocity(z_cmb, result.z_flow);
  } else {
    const double v_local_group = v_helio + local_group_correction(direction);
    for (const Attractor& a : options.attractors) result.v_pec -= galaxy_infall(a, v_local_group, direction, options);
    result.z_flow = z_flow_from_cmb(z_cmb, result.v_pec);
  }
  return result;
}

}  // namespace thirdrung
