#pragma once

#include <array>
#include <cstddef>
#include <string>

#include "base/error.h"

namespace thirdrung {

/// Published mean extinction laws of the Milky Way.
enum class DustLaw {
  odonnell94,    ///< Cardelli, Clayton & Mathis 1989 with the optical coefficients of O'Donnell 1994, ApJ 422, 158.
  fitzpatrick99  ///< Fitzpatrick 1999, PASP 111, 63: spline through anchors, R_V-dependent.
};

/// "odonnell94" or "fitzpatrick99"; throws InputError (at `place`, naming the nearest known law) otherwise.
DustLaw dust_law_from_name(const std::string& name, const Place& place = {});
std::string name_of(DustLaw law);

/// Extinction A(λ) [mag] for reddening E(B−V) [mag] at observer-frame wavelength [angstrom].
///
/// odonnell94: a(x) + b(x)/R_V with x = 1/λ in µm⁻¹ (CCM 1989 eqs. 2–5; O'Donnell 1994 eqs. 3a, 3b in 1.1 < x < 3.3).
/// fitzpatrick99: natural cubic spline in x through the anchors of Fitzpatrick 1999, Tables 3 and 4, redward of 2700 Å;
/// the ultraviolet formula of Fitzpatrick & Massa 1990 with the coefficients of his appendix blueward.
///
/// odonnell94: 1000 Å to 3.3 µm; fitzpatrick99: 910 Å to 6 µm. Outside these the nearest value is held.
class Extinction {
 public:
  /// @param r_v total-to-selective extinction A(V)/E(B−V), between 2 and 6; throws InputError outside.
  explicit Extinction(DustLaw law = DustLaw::fitzpatrick99, double r_v = 3.1);

  double magnitudes(double wavelength_angstrom, double ebv) const;
  /// A(λ)/A(V).
  double relative(double wavelength_angstrom) const;
  double r_v() const { return r_v_; }
  DustLaw law() const { return law_; }

 private:
  DustLaw law_;
  double r_v_;
  // Cubic spline of A(λ)/E(B−V) in x = 1/λ [µm⁻¹]: values and second derivatives at the anchors (fitzpatrick99 only).
  static constexpr std::size_t anchors = 9;
  std::array<double, anchors> spline_values_ = {};
  std::array<double, anchors> spline_curvatures_ = {};
};

}  // namespace thirdrung
