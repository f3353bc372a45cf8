#pragma once

#include <vector>

#include "light/dust_law.h"
#include "light/passband.h"

namespace thirdrung {

/// A passband as the rest frame of one supernova sees it: flux = 10^(−0.4 m_B) Σ_j weight_j φ(p, λ_j; s, c), in uJy on
/// the AB scale.
///
/// Observed flux density f_λ(λ_o) = φ(p, λ_o/(1+z))/(1+z), dimmed by Milky Way dust in the observer frame, integrated
/// over the photon response. The response times λ_o is integrated exactly against the cubic Lagrange interpolation
/// between the points of a regular rest-frame grid, so the sum is exact where φ times the dust's transmission is cubic
/// between them. A few weights at the band's feet may be slightly negative.
struct BandWeights {
  std::vector<double> wavelength;  ///< Rest frame [angstrom], multiples of the step.
  std::vector<double> weight;      ///< [uJy per erg s^-1 cm^-2 angstrom^-1].
  double mean_wavelength = 0;      ///< Photon-weighted mean of the passband over 1 + z [angstrom].
  double step = 0;                 ///< [angstrom].
};

/// @param z heliocentric redshift. @param ebv Milky Way E(B−V) [mag]. @param step rest-frame grid [angstrom].
BandWeights band_weights(const Passband& passband, double z, const Extinction& dust, double ebv, double step = 25.0);

}  // namespace thirdrung
