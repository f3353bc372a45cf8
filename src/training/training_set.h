#pragma once

#include <functional>
#include <string>
#include <vector>

#include "light/dust_law.h"
#include "light/passband_catalogue.h"
#include "lightcurve/photometry.h"
#include "sample/supernova.h"
#include "template/band_weights.h"
#include "template/spectral_template.h"

namespace thirdrung {

/// One band of one training supernova: its response on the template's bases.
struct TrainingBand {
  std::string passband;
  BandWeights weights;
  std::vector<CubicBasis::Weights> phi, gamma, colour;  ///< Wavelength bases at each point of `weights`.
  int phi_first = 0, phi_count = 0;  ///< Range of Φ's wavelength coefficients that the band touches.
  int gamma_first = 0, gamma_count = 0;
  int colour_first = 0, colour_count = 0;
  std::size_t begin = 0, end = 0;  ///< Its epochs in TrainingSupernova::epochs.
};

struct TrainingEpoch {
  double mjd = 0;
  double flux = 0;        ///< [uJy].
  double flux_error = 0;  ///< [uJy].
};

/// What is unknown of one supernova: date of B maximum [d], peak magnitude, stretch, colour.
struct SupernovaUnknowns {
  double t_0 = 0, m_b = 0, s = 1, c = 0;
};

/// One supernova as the trainer sees it, with its epochs sorted by band.
struct TrainingSupernova {
  std::string name;
  std::string survey;
  double z_helio = 0;
  std::vector<TrainingBand> bands;
  std::vector<TrainingEpoch> epochs;
  double t_0_guess = 0;
};

/// A band's response on the template's bases; its epochs are left to the caller.
TrainingBand band_on_bases(const std::string& id, BandWeights weights, const SpectralTemplate& bases);

/// Puts one supernova's bands onto the template's bases. Bands outside the template's bases, and epochs more than
/// `phases` (rest-frame days) from `t_0_guess`, are left out.
TrainingSupernova prepare_supernova(const LightCurve& light_curve, const Supernova& supernova, double t_0_guess,
                                    const SpectralTemplate& bases, const PassbandCatalogue& catalogue,
                                    const Extinction& dust, std::pair<double, double> phases);

/// Leaves out all epochs but those that `keep` is true for (by index), and bands without any.
void keep_epochs(TrainingSupernova& sn, const std::function<bool(std::size_t)>& keep);

}  // namespace thirdrung
