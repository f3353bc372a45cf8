#pragma once

#include <span>
#include <string>
#include <vector>

#include "sky/position.h"
#include "sky/sun_motion.h"

namespace thirdrung {

/// A mass concentration that the Local Group and its surroundings fall towards (Mould et al. 2000, ApJ 529, 786, Table
/// A1).
struct Attractor {
  std::string name;
  Galactic centre;
  double velocity = 0.0;      ///< Its distance, as a velocity in the frame of the Local Group [km/s].
  double infall_at_us = 0.0;  ///< Infall of the Local Group towards it, V_fid [km/s].
  double radius = 0.0;        ///< Angular radius of its region [deg].
  double velocity_low = 0.0;  ///< Range of heliocentric velocities of its region [km/s].
  double velocity_high = 0.0;
};

/// Virgo, the Great Attractor and the Shapley concentration with the numbers of Mould et al. 2000, Table A1 (centres
/// B1950).
std::vector<Attractor> published_attractors();

/// What to do with a galaxy that lies in an attractor's region, where the infall formula diverges.
enum class AttractorRegion {
  /// The infall towards the centre falls linearly to zero within the region's radius V_a sin(radius). Our default: the
  /// published
  /// rule moves a supernova anywhere in Shapley's range (0.033 < z < 0.053) to one distance, by up to 3600 km/s.
  softened,
  /// As published: the galaxy is taken to be at the attractor's centre and distance.
  at_centre
};

struct InfallOptions {
  std::vector<Attractor> attractors = published_attractors();
  AttractorRegion region = AttractorRegion::softened;
  double slope = 2.0;     ///< γ, density of an attractor as r^−γ (Mould et al. 2000).
  double strength = 1.0;  ///< Scales every V_fid: for varying the field as a whole.
};

struct InfallResult {
  double v_flow = 0.0;  ///< c z_flow: "cosmic velocity" of the paper [km/s].
  double z_flow = 0.0;
  double v_pec = 0.0;  ///< (1 + z_cmb) = (1 + z_flow)(1 + v_pec/c) [km/s].
  std::string inside;  ///< Name of the attractor whose region the galaxy lies in, or "".
};

/// Velocity [km/s] that takes a heliocentric velocity to the centroid of the Local Group (Yahil, Tammann & Sandage
/// 1977, ApJ 217, 903, in the form of Mould et al. 2000, eq. A1): −79 cos l cos b + 296 sin l cos b − 36 sin b.
double local_group_correction(const Galactic& direction);

/// Infall correction of one attractor [km/s], to be added to the Local Group velocity (Mould et al. 2000, eq. A2):
///   V_fid cos θ + V_fid (V_o − V_a cos θ)/r_oa × (r_oa/V_a)^(1−γ),  r_oa² = V_o² + V_a² − 2 V_o V_a cos θ.
///
/// Signs: the first term gives back what our own fall towards the attractor takes off the velocity of a galaxy in its
/// direction; the second does so for the galaxy's fall (a galaxy behind the attractor comes towards us and gets a
/// positive correction).
/// @param v_local_group velocity V_o of the galaxy in the frame of the Local Group, which stands for its distance
/// [km/s].
double infall_correction(const Attractor& attractor, double v_local_group, const Galactic& direction,
                         const InfallOptions& options = {});

/// Flow redshift and peculiar velocity of a galaxy from its heliocentric redshift, by the infall model.
///
/// The published sum V_cosmic = V_helio + V_LG + Σ V_infall is used for the velocities; the total correction ΔV is then
/// applied as (1 + z_flow) = (1 + z_helio)(1 + ΔV/c), which is the same at low redshift and differs from it by z ΔV (30
/// km/s at z = 0.1). v_pec follows from z_flow and the CMB redshift. It keeps, at every distance, the part of our
/// motion in the CMB frame that the attractors do not explain.
InfallResult infall_flow(double z_helio, const Galactic& direction, const SunMotion& sun = {},
                         const InfallOptions& options = {});

}  // namespace thirdrung
