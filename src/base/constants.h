#pragma once

#include <numbers>

namespace thirdrung {

/// Physical constants; exact values of the SI (BIPM, SI Brochure, 9th edition, 2019) unless said.
namespace constants {

inline constexpr double speed_of_light_km_s = 299792.458;
inline constexpr double speed_of_light_angstrom_s = 2.99792458e18;
/// Planck constant times speed of light [erg angstrom].
inline constexpr double planck_times_c_erg_angstrom = 6.62607015e-27 * 2.99792458e18;
/// 1 Jy in erg s^-1 cm^-2 Hz^-1.
inline constexpr double jansky_cgs = 1e-23;
/// Flux density of magnitude zero on the AB scale [Jy] (Oke & Gunn 1983, ApJ 266, 713; the value that IAU 2015 practice
/// rounds to).
inline constexpr double ab_zero_jansky = 3631.0;

inline constexpr double pi = std::numbers::pi;
inline constexpr double degree = pi / 180.0;
/// ln(10)/2.5: natural-log flux per magnitude.
inline constexpr double ln_flux_per_mag = 0.921034037197618273607196581874;

}  // namespace constants
}  // namespace thirdrung
