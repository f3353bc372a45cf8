#pragma once

#include <string>
#include <vector>

#include "light/passband_catalogue.h"
#include "template/spectral_template.h"

namespace thirdrung {

/// Grids of a template to be trained. Defaults are those of the template shipped.
struct TemplateBasesOptions {
  double phase_first = -20, phase_last = 60;                ///< [d].
  double phase_step = 3;                                    ///< Near maximum [d]; wider before −8 d and after 28 d.
  double wavelength_first = 2200, wavelength_last = 10700;  ///< [angstrom].
  double fine_first = 3300, fine_last = 7600;               ///< Where spectra show features [angstrom].
  double fine_step = 140;                                   ///< Knots there [angstrom].
  double coarse_step = 200;                                 ///< Knots elsewhere [angstrom].
  double usable_blue = 2500, usable_red = 10300;            ///< Bands beyond are not fitted [angstrom].
  double usable_early = -17, usable_late = 55;              ///< Phases beyond are not fitted [d].
};

/// A template with grids and gauge weights, its coefficients at the crude start, its scatter at 5%.
///
/// @param gauge_b, gauge_v ids of rest-frame Bessell B and V in the catalogue, with the Vega system as magnitude zero.
SpectralTemplate start_template(const TemplateBasesOptions& options, const PassbandCatalogue& catalogue,
                                const std::string& gauge_b, const std::string& gauge_v);

}  // namespace thirdrung
