#pragma once

#include <Eigen/Core>
#include <memory>
#include <vector>

#include "template/band_weights.h"
#include "template/spectral_template.h"
#include "template/template_grid.h"

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

/// A stretch and a colour, with their monomials: made once for all bands and phases of one evaluation.
class StretchColour {
 public:
  StretchColour(double s, double c);

 private:
  friend class BandTable;
  using Terms = Eigen::Array<double, 16, 1>;
  Terms monomial_;  ///< u^a v^b by total degree, and a zero, see BandTable.
  Terms by_s_;
  Terms by_c_;
};

/// Log flux in one band against q = p/s, expanded in stretch and colour.
///
/// ln f(q; s, c) is a cubic spline in q whose values are polynomials of total degree 4 in u = s − 1 and v = c − 0.2,
/// the logarithm of the band's moment series f = Σ u^a v^b M_ab / (a! b!), M_ab = Σ_j weight_j e^(Φ + 0.2 k) Γ^a k^b
/// with k = −0.921 K. Within 0.2 mmag of integrate_band for s in 0.6–1.4, c in −0.3–0.6. Linear in ln f outside the
/// phases of its nodes.
class BandTable {
 public:
  static constexpr std::size_t terms = 15;  ///< Monomials u^a v^b with a + b <= 4, by total degree.

  /// @param band made with the wavelength step of `grid`; throws std::invalid_argument otherwise.
  BandTable(const TemplateGrid& grid, const BandWeights& band);
  /// A single table without a grid at hand, for phases [q_min, q_max]; slower by far.
  BandTable(const SpectralTemplate& model, const BandWeights& band, double q_min, double q_max);

  BandFlux at(double q, const StretchColour& where) const;
  BandFlux at(double q, double s, double c) const { return at(q, StretchColour(s, c)); }
  /// ln flux at every node, for scans that can do with straight lines between the nodes.
  std::vector<double> log_flux_at_nodes(double s, double c) const;
  const PhaseNodes& nodes() const { return *nodes_; }
  double mean_wavelength() const { return mean_wavelength_; }

 private:
  static constexpr std::size_t stride = 16;  ///< Terms of a node with one zero, so that they fill whole registers.

  std::shared_ptr<const PhaseNodes> nodes_;
  std::vector<double> value_;  ///< Coefficients of the terms, node by node.
  std::vector<double> slope_;  ///< Their derivatives in q.
  double mean_wavelength_ = 0;
};

}  // namespace thirdrung
