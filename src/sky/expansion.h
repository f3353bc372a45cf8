#pragma once

namespace thirdrung {

/// How the smooth universe expands, at the redshifts where H0 itself drops out.
///
/// Two descriptions: the series of the luminosity distance in z with deceleration q0 and jerk j0, and flat ΛCDM (matter
/// and a cosmological constant, no radiation). Every distance below is in units of c/H0, so none depends on H0.
struct Expansion {
  enum class Form { series, flat_lcdm };
  Form form = Form::series;
  double q0 = -0.55;     ///< Deceleration; used by the series.
  double j0 = 1.0;       ///< Jerk; used by the series.
  double omega_m = 0.3;  ///< Matter density; used by flat ΛCDM (0.3 has q0 = −0.55, j0 = 1).

  static Expansion series(double q0, double j0) { return {Form::series, q0, j0, 0.3}; }
  static Expansion flat_lcdm(double omega_m) { return {Form::flat_lcdm, 1.5 * omega_m - 1.0, 1.0, omega_m}; }
};

/// H0 d_L / c at the flow redshift, both redshifts equal.
///
/// series: z [1 + ½(1 − q0) z − ⅙(1 − q0 − 3 q0² + j0) z²] (Visser 2004, Class. Quantum Grav. 21, 2603, eq. 39, flat,
/// to third order); flat_lcdm: (1 + z) ∫₀ᶻ dx / sqrt(Ω_m (1 + x)³ + 1 − Ω_m) (Hogg 1999, astro-ph/9905116, eqs. 14–15,
/// 21).
double luminosity_distance(double z, const Expansion& expansion = {});

/// H0 d_L / c of a source that is seen at z_helio and whose distance belongs to z_flow: (1 + z_helio)/(1 + z_flow) ×
/// d_L(z_flow), since photon energy and rate fall with the observed redshift (e.g. Davis et al. 2011, ApJ 741, 67, eq.
/// 15; from memory).
double luminosity_distance(double z_flow, double z_helio, const Expansion& expansion);

/// H0 d_C / c, the line-of-sight comoving distance d_L/(1 + z).
double comoving_distance(double z, const Expansion& expansion = {});

/// Comoving distance in Mpc/h (c/H0 = 2997.92458 Mpc/h).
double comoving_distance_mpc_h(double z, const Expansion& expansion = {});

/// log10(c H0 d_L / c) with c in km/s: the redshift part of a_B, log10{c z [1 + ½(1 − q0) z − …]} in the form of Riess
/// et al. 2016, ApJ 826, 56, eq. 5, and the same quantity of flat ΛCDM.
double log_expansion_term(double z, const Expansion& expansion = {});

/// d(log_expansion_term)/dz, for turning a redshift error into one of a_B.
double log_expansion_slope(double z, const Expansion& expansion = {});

}  // namespace thirdrung
