#pragma once

#include <string>
#include <string_view>

#include "tables/table.h"

namespace thirdrung {

// Plain CSV: a line of column names, then one line a row, delimited by ',' (or by tab or ';' where the line of names
// has those and no comma). Lines that begin with '#' are passed over. An empty field is missing.
//
// CSV says nothing of types and units. A column is whole numbers, reals or truth values (True, False) if every field
// that is not empty is one, else text; columns that hold names (supernova, passband, survey, sample...) are always
// text. Units come from the name of the column, see csv_default_unit().

/// Unit that a column of a plain CSV file has by its name, "" for a pure number:
/// mjd, peak_mjd, peak_mjd_guess, t_0, phase: d; ra, dec, gal_l, gal_b: deg; flux, model_flux: uJy;
/// mag, m_b, c, colour, mw_ebv, m_b_standardised, residual: mag; wavelength: Angstrom; v_pec: km / s; host_log_mass:
/// dex; and the same for any of them with _error behind it.
std::string csv_default_unit(std::string_view column);

/// Table of the text of a CSV file. @param file name for the table's origin and for errors. Throws InputError.
Table parse_csv(std::string_view text, const std::string& file);

/// Text of a CSV file. A column whose name has a default unit is converted to it; other units, descriptions and
/// remarks are not kept. Throws InputError if a unit does not convert.
std::string format_csv(const Table& table);

}  // namespace thirdrung
