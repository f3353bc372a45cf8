#pragma once

#include <map>
#include <string>

#include "lightcurve/photometry.h"
#include "pipeline/run_section.h"

namespace thirdrung {

/// Factors on the measured errors of a survey, for tables that state them too small or too large.
struct ErrorScale {
  Place place;  ///< Where it is written, for messages.
  double of_all = 1;
  std::map<std::string, double> of_passband;  ///< By id; the others keep their errors.

  /// Multiplies the flux errors. Throws InputError for a passband that the survey does not have, unless the light
  /// curves set aside may have had it.
  void apply(Photometry& photometry, const PassbandCatalogue& catalogue) const;
};

/// The key `error_scale` of a survey: one number for all passbands, or { passband = number }; 1 without it. Factors
/// from 0.1 to 10.
ErrorScale read_error_scale(RunSection& survey);

}  // namespace thirdrung
