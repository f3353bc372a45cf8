#pragma once

#include <span>
#include <vector>

#include "lightcurve/fit.h"
#include "tables/table.h"

namespace thirdrung {

/// One row a fit (docs/formats.md, "lightcurve-fits"). Missing numbers are those of fits that gave none.
Table fits_table(std::span<const LightCurveFit> fits);

/// One row a fitted epoch (docs/formats.md, "lightcurve-points").
/// @param light_curves the input of the fits; each fit is matched by supernova and survey.
Table points_table(std::span<const LightCurveFit> fits, std::span<const LightCurve> light_curves);

/// One row a point of the smooth model curves, for fits made with FitOptions::curves (docs/formats.md,
/// "lightcurve-curves").
Table curves_table(std::span<const LightCurveFit> fits, std::span<const LightCurve> light_curves);

/// A row of fits_table as a later stage needs it.
struct FittedSupernova {
  LightCurveFit fit;    ///< Without epochs, curves and remarks.
  std::string remarks;  ///< In words.
  bool trusted = false;
  int mistrusted_epochs = 0;
  Place place;  ///< Row it was read from.
};

/// Reads fits_table back. Throws InputError for missing columns, wrong units, a supernova that appears twice for one
/// survey, or a covariance that is not positive definite.
std::vector<FittedSupernova> read_fits(const Table& table);

}  // namespace thirdrung
