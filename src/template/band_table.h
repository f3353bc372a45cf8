#pragma once

#include <array>
#include <vector>

#include "template/band_weights.h"
#include "template/spectral_template.h"

namespace thirdrung {

/// Model flux in one band with its derivatives, at m_B = 0.
struct BandFlux {
  double flux = 0;  ///< [uJy].
  double d_q = 0;   ///< ∂/∂q at fixed s [uJy/d].
  double d_s = 0;   ///< ∂/∂s at fixed q [uJy].
  double d_c = 0;   ///< ∂/∂c [uJy/mag].
};

/// Direct integral over the band; the reference that the table is tested against.
BandFlux integrate_band(const SpectralTemplate& model, const BandWeights& band, double q, double s, double c);

/// Log flux in one band against q = p/s, expanded in stretch and colour.
///
/// ln f(q; s, c) is a cubic Hermite spline in q whose values are polynomials in (s − 1) and c: the joint cumulants of Γ
/// and K over the band at each q, to fourth order. Within 0.2 mmag of integrate_band for s in 0.6–1.4, c in −0.3–0.6.
/// Linear in ln f outside the phases [q_min, q_max] it was made for.
class BandTable {
 public:
  BandTable(const SpectralTemplate& model, const BandWeights& band, double q_min, double q_max);

  BandFlux at(double q, double s, double c) const;
  double mean_wavelength() const { return mean_wavelength_; }

 private:
  static constexpr int terms = 15;  ///< Monomials u^i c^j with i + j <= 4.
  struct Node {
    std::array<double, terms> value;
    std::array<double, terms> slope;
  };

  std::vector<double> q_;
  std::vector<Node> nodes_;
  double mean_wavelength_ = 0;
};

}  // namespace thirdrung
