#pragma once

#include <Eigen/Core>

#include "template/spectral_template.h"

namespace thirdrung {

/// Where each trained coefficient of a template stands in one long vector: Φ (phase by phase, wavelength running
/// fastest), then Γ in the same order, then K.
struct CoefficientLayout {
  int phi_phases = 0, phi_wavelengths = 0;
  int gamma_phases = 0, gamma_wavelengths = 0;
  int colours = 0;

  explicit CoefficientLayout(const SpectralTemplate& model);

  int phi(int phase, int wavelength) const { return phase * phi_wavelengths + wavelength; }
  int gamma(int phase, int wavelength) const { return gamma_start() + phase * gamma_wavelengths + wavelength; }
  int colour(int k) const { return colour_start() + k; }
  int gamma_start() const { return phi_phases * phi_wavelengths; }
  int colour_start() const { return gamma_start() + gamma_phases * gamma_wavelengths; }
  int size() const { return colour_start() + colours; }

  /// The coefficients of a template as one vector, and back into a template of the same bases.
  Eigen::VectorXd gather(const SpectralTemplate& model) const;
  void scatter(const Eigen::VectorXd& coefficients, SpectralTemplate& model) const;
};

}  // namespace thirdrung
