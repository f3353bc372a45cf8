#pragma once

#include <string>
#include <vector>

#include "tables/fits_keywords.h"
#include "tables/table.h"

namespace thirdrung {

// Binary tables of FITS. Reals are kept as D, whole numbers as K, truth values as L, texts as A in UTF-8.
//
// Missing: NaN, the value of TNULLn, the undefined truth value, a text of blanks only (as astropy reads them; FITS has
// no other way to say it, so an empty text and a NaN come back as missing). Trailing blanks of texts are not kept.
// Units are written in the FITS standard's spelling, descriptions as TCOMMn, remarks as header keywords.
//
// On reading, columns that hold an array in every cell are left out of the table; FitsReader::array_column has them.

/// Bytes of a FITS file with an empty primary HDU and the table, checksums included. @param name EXTNAME, may be "".
std::string format_fits_table(const Table& table, const std::string& name);

/// First table of a FITS file. @param file name for the table's origin and for errors.
/// Throws InputError if the file is not sound FITS or holds no table.
Table parse_fits_table(std::string content, const std::string& file);

/// Adds the table behind the last HDU of a file, or reads the one that the handle stands on.
void append_fits_table(const FitsHandle& fits, const Table& table, const std::string& name,
                       const FitsKeywords& keywords);
Table read_fits_table(const FitsHandle& fits);

/// The first `count` numbers of a column of the table that the handle stands on, missing ones as NaN. (Where CFITSIO
/// looks for missing values among floating-point numbers it takes infinity for one, and denormal numbers for 0.)
std::vector<double> read_real_column(const FitsHandle& fits, int number, std::size_t count);

}  // namespace thirdrung
