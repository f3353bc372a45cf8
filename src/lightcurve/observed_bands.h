#pragma once

#include <string>
#include <vector>

#include "lightcurve/fit.h"

namespace thirdrung {

/// A band of one light curve that the template covers.
struct ObservedBand {
  std::size_t passband = 0;    ///< Index into LightCurve::passbands.
  BandTable table;             ///< Its model flux.
  double mean_wavelength = 0;  ///< Rest frame [angstrom].
  double colour_scatter = 0;   ///< κ at the mean wavelength; 0 if the template's scatter is not counted.
};

/// One measurement in a covered band, times counted from ObservedBands::reference_mjd.
struct Observation {
  double time = 0;  ///< [d]
  double flux = 0;
  double variance = 0;
  std::size_t band = 0;   ///< Index into ObservedBands::bands.
  std::size_t epoch = 0;  ///< Index into LightCurve::epochs.
};

/// A light curve sorted for fitting: covered bands from blue to red, their measurements band by band in order of time.
struct ObservedBands {
  double z = 0;
  double reference_mjd = 0;  ///< Middle of the data [d].
  double half_span = 0;      ///< Half the time between first and last measurement [d].
  std::vector<ObservedBand> bands;
  std::vector<Observation> observations;
  std::vector<BandLeftOut> left_out;
};

ObservedBands observed_bands(const LightCurve& light_curve, const Supernova& supernova,
                             const PreparedTemplate& prepared, const PassbandCatalogue& catalogue,
                             const Extinction& dust, bool template_scatter);

}  // namespace thirdrung
