#pragma once

#include <optional>
#include <string>
#include <string_view>

#include "base/error.h"

namespace thirdrung {

/// Factor that turns a value in unit `from` into one in unit `to`.
///
/// Units are read as the FITS standard 4.0 (section 4.3) and astropy spell them: products of named units with powers,
/// "uJy", "km / s", "km s-1", "erg / (Angstrom cm2 s)", "erg.s**-1.cm**-2.Angstrom**-1", "1e-17 erg / (Angstrom cm2
/// s)", with the prefixes of the SI before units that take one. "dex(solMass)" counts as "dex", and a maggy as 3631 Jy.
/// Two units convert if their dimensions agree; magnitudes and dex are dimensions of their own, so that a flux never
/// passes for a magnitude. Powers of ten are exact: "nm" to "Angstrom" is 10.
///
/// @param place where the unit stands, for the message. Throws InputError if `from` is absent, unknown, or of another
/// kind than `to`; std::logic_error if `to` is no unit.
double conversion_factor(const std::string& from, const std::string& to, const Place& place);

/// The unit in the spelling that the FITS standard prefers ("km s-1", "erg s-1 cm-2 Angstrom-1"), or unchanged if it
/// is not a product of known units.
std::string fits_spelling(const std::string& unit);

}  // namespace thirdrung
