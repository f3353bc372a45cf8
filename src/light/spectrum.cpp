#include "light/spectrum.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "base/error.h"

namespace thirdrung {

using std::size_t;

double Spectrum::at(double wavelength_angstrom) const {
  if (wavelength.empty() || !(wavelength_angstrom >= wavelength.front() && wavelength_angstrom <= wavelength.back()))
    return 0;
  if (wavelength.size() == 1) return flux.front();
  const auto above = std::upper_bound(wavelength.begin() + 1, wavelength.end() - 1, wavelength_angstrom);
  const auto i = static_cast<size_t>(above - wavelength.begin());
  const double right = (wavelength_angstrom - wavelength[i - 1]) / (wavelength[i] - wavelength[i - 1]);
  return flux[i - 1] + right * (flux[i] - flux[i - 1]);
}

Spectrum read_spectrum(const Table& table) {
  Spectrum spectrum{table.reals_in("wavelength", "Angstrom"), table.reals_in("flux", "erg / (Angstrom cm2 s)")};
  if (spectrum.wavelength.size() < 2) {
    throw InputError({table.origin(), {}, {}}, fmt::format("the spectrum has {} points", spectrum.wavelength.size()),
                     "give at least two");
  }
  for (size_t i = 0; i < spectrum.wavelength.size(); ++i) {
    const double here = spectrum.wavelength[i];
    if (!std::isfinite(here) || here <= 0) {
      throw InputError(table.place(i, "wavelength"), fmt::format("wavelength {} is not a positive number", here),
                       "mend the value or leave the row out");
    }
    if (i > 0 && here <= spectrum.wavelength[i - 1]) {
      throw InputError(table.place(i, "wavelength"),
                       fmt::format("wavelength {} does not increase after {}", here, spectrum.wavelength[i - 1]),
                       "sort the rows by wavelength and give each wavelength once");
    }
    if (!std::isfinite(spectrum.flux[i])) {
      throw InputError(table.place(i, "flux"), "the flux is missing or not a number",
                       "mend the value or leave the row out");
    }
  }
  return spectrum;
}

}  // namespace thirdrung
