#pragma once

#include <filesystem>
#include <map>
#include <optional>
#include <string>
#include <vector>

#include "light/passband.h"
#include "light/spectrum.h"

namespace thirdrung {

/// How magnitude zero is fixed in a passband.
enum class MagnitudeSystem {
  ab,        ///< f_ν = 3631 Jy (Oke & Gunn 1983).
  standard,  ///< The standard star's spectrum has magnitude 0 (`system = "vega"` in the catalogue).
  synthetic  ///< m = zero_point − 2.5 log10((1/hc) ∫ T λ f_λ dλ), cgs units with λ in angstrom.
};

/// A passband with its calibration: what turns a tabulated magnitude or flux into photons.
///
/// All photometry is carried inside the program as flux on the AB scale [uJy]: the photon rate divided by that of a
/// source of constant f_ν, times that f_ν. The magnitude system enters only through `ab_magnitude_of_zero`.
struct CalibratedPassband {
  Passband passband;
  MagnitudeSystem system = MagnitudeSystem::ab;
  double ab_magnitude_of_zero = 0;  ///< AB magnitude of a source of magnitude 0 in the system [mag].
  double ab_offset = 0;             ///< Added to a tabulated magnitude to reach the stated system [mag].
  double zero_point_error = 0;      ///< 1σ [mag].
  double wavelength_error = 0;      ///< 1σ shift of the whole curve [angstrom].
  std::string source = {};

  /// Flux on the AB scale [uJy] of a tabulated magnitude.
  double flux_of_magnitude(double magnitude) const;
  /// Flux on the AB scale [uJy] of a tabulated flux, to which ab_offset applies as to a magnitude.
  double flux_of_flux(double flux_ujy) const;
  /// Magnitude as it would be tabulated, of a flux on the AB scale [uJy]; the inverse of flux_of_magnitude.
  double magnitude_of_flux(double flux_ujy) const;
};

/// The same calibration with the whole curve moved by `shift` [angstrom]: what magnitude zero means follows the moved
/// curve.
/// @param standard_star needed (std::logic_error without) where the system refers to it.
CalibratedPassband with_wavelength_shift(const CalibratedPassband& calibrated, double shift_angstrom,
                                         const std::optional<Spectrum>& standard_star);

/// Calibration by passband id.
class PassbandCatalogue {
 public:
  PassbandCatalogue() = default;

  /// Reads catalogue.toml (docs/formats.md) and the curves that it names, relative to its folder.
  /// @param standard_star spectrum that `system = "vega"` refers to; an entry that needs it throws InputError without.
  static PassbandCatalogue read(const std::filesystem::path& path, const std::optional<Spectrum>& standard_star);

  void add(CalibratedPassband entry);
  bool has(const std::string& id) const { return entries_.contains(id); }
  /// Throws InputError (at `place`, naming the nearest known id) if there is none of that name.
  const CalibratedPassband& at(const std::string& id, const Place& place = {}) const;
  std::vector<std::string> ids() const;

 private:
  std::map<std::string, CalibratedPassband> entries_;
  std::string origin_;
};

}  // namespace thirdrung
