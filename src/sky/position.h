#pragma once

#include <array>

namespace thirdrung {

using UnitVector = std::array<double, 3>;

/// Galactic coordinates in the IAU 1958 system [deg]: longitude l in 0 to 360, latitude b in −90 to 90.
struct Galactic {
  double l = 0.0;
  double b = 0.0;
};

/// A direction in the ICRS [deg].
struct Equatorial {
  double ra = 0.0;
  double dec = 0.0;
};

/// ICRS to Galactic with the rotation of the Hipparcos Catalogue (ESA 1997, SP-1200, vol. 1, sect. 1.5.3), by ERFA.
Galactic galactic_from_icrs(double ra, double dec);

/// The way back.
Equatorial icrs_from_galactic(double l, double b);

/// A B1950 (FK4) direction, as older papers print it, brought to the ICRS by ERFA. The direction is taken as that of an
/// extragalactic object without proper motion; FK5 J2000 stands for the ICRS (they agree to 0.03 arcsec).
Equatorial icrs_from_b1950(double ra, double dec);

/// Cartesian unit vector of a direction given as longitude and latitude [deg]; x points to (0, 0), z to latitude 90.
UnitVector unit_vector(double longitude, double latitude);

inline double dot(const UnitVector& a, const UnitVector& b) {
  return a[0] * b[0] + a[1] * b[1] + a[2] * b[2];
}

/// Angle between two directions of one system [deg], accurate also for tiny and for opposite ones.
double separation(double longitude_1, double latitude_1, double longitude_2, double latitude_2);

/// True for finite coordinates with 0 ≤ ra ≤ 360 and −90 ≤ dec ≤ 90.
bool is_direction(double ra, double dec);

}  // namespace thirdrung
