#pragma once

#include <string>
#include <vector>

#include "tables/table.h"

namespace thirdrung {

/// Flux density against wavelength, linear between the points and zero outside them.
struct Spectrum {
  std::vector<double> wavelength;  ///< [angstrom], increasing.
  std::vector<double> flux;        ///< [erg s^-1 cm^-2 angstrom^-1].

  double at(double wavelength_angstrom) const;
};

/// Columns `wavelength` (any length unit) and `flux` (any unit of flux density per wavelength). Throws InputError if a
/// unit is absent, wavelengths do not increase or a flux is not finite.
Spectrum read_spectrum(const Table& table);

}  // namespace thirdrung
