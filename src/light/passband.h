#pragma once

#include <string>
#include <utility>
#include <vector>

#include "light/spectrum.h"

namespace thirdrung {

/// What the tabulated curve multiplies: photon counts, or energy.
enum class Response { photon, energy };

/// Fraction of photons that reach the detector, against observer-frame wavelength.
///
/// Linear between the tabulated points and zero outside them. Photon-counting response: an
/// energy-response table is divided by wavelength once, here, on construction (and scaled so that its
/// largest value is unchanged; only ratios of photon rates are ever used).
class Passband {
 public:
  /// @param id name in the catalogue, used in messages and tables.
  /// Throws InputError (naming `origin` and the row) if wavelengths do not increase, a throughput is
  /// negative or not finite, fewer than three points are given, or every throughput is zero.
  Passband(std::string id, std::vector<double> wavelength_angstrom, std::vector<double> throughput, Response response,
           const std::string& origin = "");

  const std::string& id() const { return id_; }
  const std::vector<double>& wavelength() const { return wavelength_; }
  const std::vector<double>& throughput() const { return throughput_; }
  double throughput_at(double wavelength_angstrom) const;

  /// First and last wavelength with a throughput above zero beside it [angstrom].
  double blue_edge() const { return blue_edge_; }
  double red_edge() const { return red_edge_; }
  /// Wavelengths between which all but `fraction` of the photons of a flat f_λ spectrum fall, half of it cut at each
  /// end; the two edges for 0.
  std::pair<double, double> core_range(double fraction) const;

  /// Photon-weighted mean wavelength, ∫λ²T dλ / ∫λT dλ [angstrom] (Bessell & Murphy 2012, eq. A17).
  double mean_wavelength() const { return mean_wavelength_; }

  /// Photon rate N = (1/hc) ∫ f_λ T λ dλ [photon s^-1 cm^-2], exact for piecewise linear f and T.
  double photon_rate(const Spectrum& spectrum) const;
  /// Photon rate of a source with f_ν = 3631 Jy at every wavelength (Oke & Gunn 1983).
  double photon_rate_ab_zero() const { return photon_rate_ab_zero_; }

  /// The same curve with every wavelength moved by `shift_angstrom`.
  Passband shifted(double shift_angstrom) const;

 private:
  std::string id_;
  std::vector<double> wavelength_;
  std::vector<double> throughput_;
  double blue_edge_ = 0;
  double red_edge_ = 0;
  double mean_wavelength_ = 0;
  double photon_rate_ab_zero_ = 0;
};

/// AB magnitude of a spectrum in a passband, −2.5 log10(N / N of f_ν = 3631 Jy); infinite where no photon is left.
double ab_magnitude(const Spectrum& spectrum, const Passband& passband);

}  // namespace thirdrung
