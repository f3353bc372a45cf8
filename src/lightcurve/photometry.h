#pragma once

#include <cstddef>
#include <filesystem>
#include <string>
#include <vector>

#include "light/passband_catalogue.h"
#include "sample/supernova.h"
#include "tables/table.h"

namespace thirdrung {

/// One measurement of one supernova.
struct Epoch {
  double mjd = 0;            ///< [d].
  std::size_t passband = 0;  ///< Index into LightCurve::passbands.
  double flux = 0;           ///< AB scale [uJy]; may be negative.
  double flux_error = 0;     ///< 1σ [uJy].
  std::size_t row = 0;       ///< Row of the table it came from, counted from 1.
};

/// All measurements of one supernova by one survey, in the order of the input.
struct LightCurve {
  std::string supernova;
  std::string survey;
  std::vector<std::string> passbands;  ///< Ids in the catalogue, in order of first appearance.
  std::vector<Epoch> epochs;
  std::size_t repeated_rows = 0;  ///< Rows left out because they repeat an earlier one exactly.
};

/// Photometry of a survey, and the supernovae of which it cannot be used.
struct Photometry {
  std::vector<LightCurve> light_curves;  ///< In order of first appearance.
  std::vector<SetAside> set_aside;
};

/// Light curves of a table with columns `supernova`, `mjd` (d), `passband`, and either `flux` and `flux_error` (any Jy
/// multiple, AB scale) or `mag` and `mag_error` (mag, in the passband's own system); docs/formats.md.
///
/// Magnitudes become fluxes with the passband's calibration, and their errors δm flux errors f δm ln(10)/2.5; negative
/// fluxes are kept. A row that repeats an earlier one of the same supernova exactly (date, passband, value and error)
/// is a copy, not a second measurement: it is left out and counted.
///
/// Throws InputError, naming file and column, for what is wrong with the whole table: a missing column, a wrong or
/// missing unit, both fluxes and magnitudes. A bad row (no supernova name, a date, value or error that is not a finite
/// number, an error that is not positive, a passband that the catalogue lacks) sets its supernova aside with one
/// sentence that names file, row, column and remedy; if no supernova is left, that sentence is thrown.
Photometry light_curves_of(const Table& table, const PassbandCatalogue& catalogue, const std::string& survey);

/// As light_curves_of for a file, or for every table (.ecsv, .csv, .fits, .fits.gz) of a folder in order of name.
///
/// In a folder, a table without a `supernova` column belongs to the supernova that its file is named after, and the
/// tables of one supernova are joined.
Photometry read_photometry(const std::filesystem::path& path, const PassbandCatalogue& catalogue,
                           const std::string& survey);

}  // namespace thirdrung
