#pragma once

#include <string>

namespace thirdrung {

/// Published mean extinction laws of the Milky Way.
enum class DustLaw {
  odonnell94,    ///< Cardelli, Clayton & Mathis 1989 with the optical coefficients of O'Donnell 1994, ApJ 422, 158.
  fitzpatrick99  ///< Fitzpatrick 1999, PASP 111, 63: spline through anchors, R_V-dependent.
};

/// "odonnell94" or "fitzpatrick99"; throws InputError at `place_name` otherwise.
DustLaw dust_law_from_name(const std::string& name);
std::string name_of(DustLaw law);

/// Extinction A(λ) [mag] for reddening E(B−V) [mag] at observer-frame wavelength [angstrom].
///
/// odonnell94: 1000 Å to 3.3 µm; fitzpatrick99: 910 Å to 6 µm. Outside these the nearest value is held.
class Extinction {
 public:
  /// @param r_v total-to-selective extinction A(V)/E(B−V), between 2 and 6.
  explicit Extinction(DustLaw law = DustLaw::fitzpatrick99, double r_v = 3.1);

  double magnitudes(double wavelength_angstrom, double ebv) const;
  /// A(λ)/A(V).
  double relative(double wavelength_angstrom) const;
  double r_v() const { return r_v_; }
  DustLaw law() const { return law_; }

 private:
  DustLaw law_;
  double r_v_;
  double spline_knots_[16] = {};
  double spline_values_[16] = {};
  double spline_curvatures_[16] = {};
  int spline_size_ = 0;
};

}  // namespace thirdrung
