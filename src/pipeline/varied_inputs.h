#pragma once

#include <functional>
#include <memory>
#include <string>
#include <vector>

#include "pipeline/inputs.h"
#include "pipeline/run_file.h"
#include "template/trained_template.h"

namespace thirdrung {

/// All inputs of a run as read, any of which a systematic may move.
struct RunInputs {
  PassbandCatalogue catalogue;
  TrainedTemplate trained;
  std::vector<Supernova> supernovae;
  std::vector<LightCurve> light_curves;
  /// Change of the flux of an epoch, in magnitudes, per magnitude of its passband's zero on the AB scale: 1 where
  /// magnitudes were tabulated, 0 where fluxes were; one a light curve.
  std::vector<bool> from_magnitudes;
  std::optional<Spectrum> standard_star;
  RedshiftOptions redshifts;
};
/// Reads them, and keeps the light curves of the named supernovae.
RunInputs read_run_inputs(const RunFile& run, const std::vector<std::string>& supernovae);

/// One input moved by 1 sigma: what it does to the inputs, and to the settings.
struct MovedInput {
  std::string name;
  std::string kind;
  double size = 1.0;
  std::string unit;
  bool refits_light_curves = false;
  std::vector<std::string> passbands;  ///< If not empty, only light curves with one of these are fitted again.
  std::vector<std::string> surveys;    ///< If not empty, only light curves of these.
  std::function<void(RunFile&, RunInputs&)> move;
  bool scaled_after = false;  ///< The move is a whole alternative: the shift is multiplied by `size` afterwards.
  /// The move changes the covariance too: the change of a_B by its new weights counts as a shift of all magnitudes
  /// alike.
  bool moves_weights = false;
  std::string identity = {};  ///< All that tells this move from others; changes with what it does.
};

/// Every moved input that a [[systematic]] stands for: one for each passband in its scope, one for each mode of the
/// template's covariance, or one alone. Throws InputError for an unknown passband, or for one without an error in the
/// catalogue where no size is given.
std::vector<MovedInput> moved_inputs(const SystematicInput& input, const RunInputs& inputs);

/// The fits of a run once more with an input moved: those light curves that it touches are fitted again, others stay,
/// and so do those whose date of maximum jumps to another solution, which is not what a small change does.
/// @param run, inputs as moved. @param fits of the baseline.
Table fits_with(const MovedInput& moved, const RunFile& run, const RunInputs& inputs, const Table& fits);

}  // namespace thirdrung
