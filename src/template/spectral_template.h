#pragma once

#include <Eigen/Core>
#include <string>
#include <utility>
#include <vector>

#include "template/cubic_basis.h"

namespace thirdrung {

/// Spectral sequence of a Type Ia supernova with stretch and colour:
///
///   φ(p, λ; s, c) = exp[ Φ(q, λ) + (s − 1) Γ(q, λ) ] × 10^(−0.4 c K(λ)),   q = p/s,
///
/// with p the rest-frame phase in days from B maximum and λ the rest-frame wavelength in angstrom.
/// φ is in erg s^-1 cm^-2 angstrom^-1 for a supernova of rest-frame peak magnitude m_B = 0 (Bessell B, Vega system).
/// Stretch: Perlmutter et al. 1997, ApJ 483, 565; Goldhaber et al. 2001, ApJ 558, 359.
///
/// Gauge: B peaks at p = 0 with magnitude 0; ⟨K⟩ over B is 0 and over V is −1; Γ over B is 0 at p = 0 and p = 15.
struct SpectralTemplate {
  CubicBasis phase_basis;               ///< Of Φ [d].
  CubicBasis wavelength_basis;          ///< Of Φ [angstrom].
  Eigen::MatrixXd log_flux;             ///< Coefficients of Φ, phase × wavelength.
  CubicBasis stretch_phase_basis;       ///< Of Γ [d].
  CubicBasis stretch_wavelength_basis;  ///< Of Γ [angstrom].
  Eigen::MatrixXd stretch_response;     ///< Coefficients of Γ, phase × wavelength.
  CubicBasis colour_basis;              ///< Of K [angstrom].
  Eigen::VectorXd colour_law;           ///< Coefficients of K.

  std::vector<double> scatter_phase;              ///< Nodes of ε [d].
  std::vector<double> scatter_wavelength;         ///< Nodes of ε [angstrom].
  Eigen::MatrixXd log_epoch_scatter;              ///< ln ε at the nodes, bilinear between them and held outside.
  std::vector<double> colour_scatter_wavelength;  ///< Nodes of κ [angstrom].
  Eigen::VectorXd log_colour_scatter;             ///< ln κ at the nodes, linear between them and held outside.

  /// Where training data determine the template; bands and phases outside are not fitted.
  double phase_min = 0, phase_max = 0;            ///< In q [d].
  double wavelength_min = 0, wavelength_max = 0;  ///< [angstrom].

  /// Wavelengths [angstrom] and photon weights of rest-frame Bessell B and V: Σ weight × φ = 1 for magnitude 0.
  std::vector<double> gauge_wavelength;
  std::vector<double> gauge_weight_b;
  std::vector<double> gauge_weight_v;

  std::string name;
  std::vector<std::pair<std::string, std::string>> provenance;

  /// Φ, Γ and K at one point.
  double phi(double q, double wavelength) const;
  double gamma(double q, double wavelength) const;
  double colour(double wavelength) const;
  /// φ(p, λ; s, c) [erg s^-1 cm^-2 angstrom^-1].
  double flux(double p, double wavelength, double s, double c) const;

  /// Coefficients of Φ (Γ) in wavelength at one q: the phase basis summed out. Derivative in q if `slope`.
  Eigen::VectorXd phi_slice(double q, bool slope = false) const;
  Eigen::VectorXd gamma_slice(double q, bool slope = false) const;

  /// Fractional error of one epoch, ε(p, λ), and colour scatter common to a band, κ(λ), λ the band's mean wavelength
  /// over 1 + z.
  double epoch_scatter(double p, double wavelength) const;
  double colour_scatter(double wavelength) const;

  /// Rest-frame B magnitude at phase p (0 at p = 0, s = 1, c = 0 by the gauge), and the same for V.
  double b_magnitude(double p, double s = 1, double c = 0) const;
  double v_magnitude(double p, double s = 1, double c = 0) const;
  /// Decline of B in the 15 rest-frame days after its maximum [mag] (Phillips 1993).
  double dm15_b(double s, double c = 0) const;
};

/// How far a template is from its gauge, each in its own unit; all zero in exact arithmetic.
struct GaugeErrors {
  double peak_phase = 0;       ///< Phase of B maximum [d].
  double peak_magnitude = 0;   ///< B magnitude at maximum [mag].
  double colour_b = 0;         ///< ⟨K⟩ over B.
  double colour_v = 0;         ///< ⟨K⟩ over V, plus 1.
  double stretch_at_peak = 0;  ///< ⟨Γ⟩ over B at p = 0.
  double stretch_at_15 = 0;    ///< ⟨Γ⟩ over B at p = 15 d.
  double largest() const;
};
GaugeErrors gauge_errors(const SpectralTemplate& model);

}  // namespace thirdrung
