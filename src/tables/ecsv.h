#pragma once

#include <string>
#include <string_view>

#include "tables/table.h"

namespace thirdrung {

// ECSV 1.0 (Astropy Proposal for Enhancement 6): a YAML header behind '#', a line of column names, one line a row.
//
// An empty field is missing, in a text column too; a text that is empty but not missing is written "", which astropy
// reads as missing. Doubles are written with the fewest digits that read back the same. A column declared float32 or
// float16 is rounded to single precision, as any reader of its datatype would see it. Remarks ("meta") are texts:
// numbers among them are read as their text.

/// Table of the text of an ECSV file. @param file name for the table's origin and for errors.
/// Throws InputError naming row and column of the first thing that is wrong.
Table parse_ecsv(std::string_view text, const std::string& file);

/// Text of an ECSV file of the table, with ',' or ' ' as delimiter.
std::string format_ecsv(const Table& table, char delimiter = ',');

}  // namespace thirdrung
