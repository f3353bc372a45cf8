#pragma once

#include "sky/position.h"

namespace thirdrung {

/// The Sun's motion relative to the cosmic microwave background.
///
/// Default: 369.82 ± 0.11 km/s towards (l, b) = (264.021 ± 0.011°, 48.253 ± 0.005°) (Planck Collaboration I 2020,
/// A&A 641, A1, Table 3). All three are settable, so that their uncertainty can be carried through.
struct SunMotion {
  double speed = 369.82;  ///< [km/s].
  double l = 264.021;     ///< Galactic longitude of the apex [deg].
  double b = 48.253;      ///< Galactic latitude of the apex [deg].
};

/// Redshift that the Sun's motion alone gives a source in this direction: negative towards the apex.
///
/// Relativistic Doppler shift of the radial part, 1 + z_sun = sqrt((1 + w)/(1 − w)), w = −(v/c) cos θ, θ the angle to
/// the apex. (The transverse Doppler term, (v/c)²/2 < 1e-6, is below every published redshift's last digit and left
/// out.)
double z_sun(const SunMotion& sun, const Galactic& direction);

/// CMB-frame redshift: (1 + z_helio) = (1 + z_cmb)(1 + z_sun).
double z_cmb_from_helio(double z_helio, const Galactic& direction, const SunMotion& sun = {});

/// Heliocentric redshift from the CMB-frame one; the inverse of the above.
double z_helio_from_cmb(double z_cmb, const Galactic& direction, const SunMotion& sun = {});

/// Flow redshift once a peculiar velocity [km/s] is taken off: (1 + z_cmb) = (1 + z_flow)(1 + v_pec/c).
double z_flow_from_cmb(double z_cmb, double v_pec);

/// The peculiar velocity [km/s] that turns z_flow into z_cmb; the inverse of the above.
double peculiar_velocity(double z_cmb, double z_flow);

}  // namespace thirdrung
