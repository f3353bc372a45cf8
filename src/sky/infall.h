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

/// Two ways of using the attractors.
enum class InfallScheme {
  /// The attractors are at rest in the CMB frame, and a galaxy's peculiar velocity is its own fall towards them; far
  /// from all three it
  /// vanishes. Within a region's radius V_a sin(radius), where the formula diverges, the fall goes linearly to zero at
  /// the centre. Our default.
  cmb_frame,
  /// To the letter: the velocity in the Local Group's frame plus our fall and the galaxy's, and a galaxy in an
  /// attractor's region is put
  /// at its centre. For supernovae this has two costs, which is why it is not the default: the part of our motion that
  /// the
  /// attractors leave unexplained (290 km/s) becomes a dipole that never fades with distance, and a supernova
  /// anywhere in Shapley's region (0.033 < z < 0.053) is moved to one distance, by up to 3600 km/s.
  as_published
};

struct InfallOptions {
  std::vector<Attractor> attractors = published_attractors();
  InfallScheme scheme = InfallScheme::cmb_frame;
  double slope = 2.0;     ///< γ, density of an attractor as r^−γ (Mould et al. 2000).
  double strength = 1.0;  ///< Scales every V_fid: for varying the field as a whole.
};

struct InfallResult {
  double z_flow = 0.0;
  double v_pec = 0.0;  ///< (1 + z_cmb) = (1 + z_flow)(1 + v_pec/c) [km/s].
  std::string inside;  ///< Name of the attractor whose region the galaxy lies in, or "".
};

/// Velocity [km/s] that takes a heliocentric velocity to the centroid of the Local Group (Yahil, Tammann & Sandage
/// 1977, ApJ 217, 903, in the form of Mould et al. 2000, eq. A1): −79 cos l cos b + 296 sin l cos b − 36 sin b.
double local_group_correction(const Galactic& direction);

/// What our own fall towards an attractor takes off the velocity of a galaxy in this direction [km/s], to be given
/// back: V_fid cos θ, the first term of Mould et al. 2000, eq. A2.
double our_infall(const Attractor& attractor, const Galactic& direction, const InfallOptions& options = {});

/// What the galaxy's own fall takes off its velocity [km/s], to be given back: the second term,
///   V_fid (V_o − V_a cos θ)/r_oa × (r_oa/V_a)^(1−γ),  r_oa² = V_o² + V_a² − 2 V_o V_a cos θ;
/// positive for a galaxy behind the attractor, which comes towards us.
/// @param v_local_group velocity V_o of the galaxy in the frame of the Local Group, which stands for its distance
/// [km/s].
double galaxy_infall(const Attractor& attractor, double v_local_group, const Galactic& direction,
                     const InfallOptions& options = {});

/// Flow redshift and peculiar velocity of a galaxy from its heliocentric redshift, by the infall model.
///
/// cmb_frame: v_pec = −Σ galaxy_infall, taken off z_cmb. as_published: V_cosmic = V_helio + V_LG + Σ (our_infall +
/// galaxy_infall), the total correction ΔV applied as (1 + z_flow) = (1 + z_helio)(1 + ΔV/c), which is the published
/// sum at low redshift and differs from it by z ΔV; v_pec is what then leads from z_flow to z_cmb.
InfallResult infall_flow(double z_helio, const Galactic& direction, const SunMotion& sun = {},
                         const InfallOptions& options = {});

}  // namespace thirdrung
