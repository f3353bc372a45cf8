#pragma once

#include <span>
#include <string>
#include <vector>

#include "lightcurve/photometry.h"
#include "training/trainer.h"

namespace thirdrung {

/// Which supernovae the template is trained on.
struct TrainingCuts {
  int least_bands = 2;
  int least_epochs = 6;
  double earliest = -15, latest = 50;  ///< Phases used [d].
  double first_phase = 6;              ///< At least one epoch before this [d].
  int least_near_peak = 4;             ///< Epochs between −5 and +35 d.
  double most_reddening = 0.3;         ///< Milky Way E(B−V) [mag].
  double s_min = 0.72, s_max = 1.35;
  double most_colour = 0.6;  ///< |c − mean of the prior| [mag].
  double most_chi2_per_dof =
      5;  ///< Of its fit to the template of the rest: beyond, it is peculiar or its errors are wrong.
  double error_floor = 0.003;  ///< Added to every flux error in quadrature, as a fraction of the flux.
};

/// A supernova of the input with all it needs to be prepared.
struct TrainingCandidate {
  LightCurve light_curve;
  Supernova supernova;
};

/// The training set, and why everybody else is out.
struct TrainingSelection {
  std::vector<TrainingSupernova> supernovae;
  std::vector<std::size_t> candidate;  ///< Index of each into the candidates.
  std::vector<SetAside> left_out;
  TrainingState state;  ///< Template and unknowns after the coarse rounds, to go on from.
};

/// Chooses the training set in two coarse rounds of training without spectra: the first finds dates of maximum, the
/// second sees who does not fit the template of the others.
TrainingSelection select_supernovae(std::span<const TrainingCandidate> candidates, const SpectralTemplate& start,
                                    const PassbandCatalogue& catalogue, const Extinction& dust,
                                    const TrainingCuts& cuts, const TrainerOptions& options);

/// χ² per degree of freedom of a supernova's fit, every epoch counted in full.
double chi2_per_dof(const SpectralTemplate& model, const TrainingSupernova& sn, const SupernovaUnknowns& at);

}  // namespace thirdrung
