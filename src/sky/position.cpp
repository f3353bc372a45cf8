#include "sky/position.h"

#include <erfa.h>

#include <cmath>

#include "base/constants.h"

namespace thirdrung {

using constants::degree;

Galactic galactic_from_icrs(double ra, double dec) {
  double l = 0.0;
  double b = 0.0;
  eraIcrs2g(ra * degree, dec * degree, &l, &b);
  return {eraAnp(l) / degree, b / degree};
}

Equatorial icrs_from_galactic(double l, double b) {
  double ra = 0.0;
  double dec = 0.0;
  eraG2icrs(l * degree, b * degree, &ra, &dec);
  return {eraAnp(ra) / degree, dec / degree};
}

Equatorial icrs_from_b1950(double ra, double dec) {
  double r = 0.0;
  double d = 0.0;
  eraFk45z(ra * degree, dec * degree, 1950.0, &r, &d);
  return {eraAnp(r) / degree, d / degree};
}

UnitVector unit_vector(double longitude, double latitude) {
  UnitVector v = {};
  eraS2c(longitude * degree, latitude * degree, v.data());
  return v;
}

double separation(double longitude_1, double latitude_1, double longitude_2, double latitude_2) {
  return eraSeps(longitude_1 * degree, latitude_1 * degree, longitude_2 * degree, latitude_2 * degree) / degree;
}

bool is_direction(double ra, double dec) {
  return std::isfinite(ra) && std::isfinite(dec) && ra >= 0.0 && ra <= 360.0 && std::abs(dec) <= 90.0;
}

}  // namespace thirdrung
