#include "sky/sun_motion.h"

#include <cmath>

#include "base/constants.h"

namespace thirdrung {

using constants::speed_of_light_km_s;

double z_sun(const SunMotion& sun, const Galactic& direction) {
  const double cos_theta = dot(unit_vector(sun.l, sun.b), unit_vector(direction.l, direction.b));
  const double w = -sun.speed / speed_of_light_km_s * cos_theta;
  return std::sqrt((1.0 + w) / (1.0 - w)) - 1.0;
}

double z_cmb_from_helio(double z_helio, const Galactic& direction, const SunMotion& sun) {
  return (1.0 + z_helio) / (1.0 + z_sun(sun, direction)) - 1.0;
}

double z_helio_from_cmb(double z_cmb, const Galactic& direction, const SunMotion& sun) {
  return (1.0 + z_cmb) * (1.0 + z_sun(sun, direction)) - 1.0;
}

double z_flow_from_cmb(double z_cmb, double v_pec) {
  return (1.0 + z_cmb) / (1.0 + v_pec / speed_of_light_km_s) - 1.0;
}

double peculiar_velocity(double z_cmb, double z_flow) {
  return speed_of_light_km_s * ((1.0 + z_cmb) / (1.0 + z_flow) - 1.0);
}

}  // namespace thirdrung
