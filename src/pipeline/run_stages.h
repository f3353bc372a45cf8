#pragma once

#include <filesystem>
#include <functional>
#include <string>
#include <vector>

#include "pipeline/run_file.h"

namespace thirdrung {

/// The stages of a run, in order. Each works on the tables that the stages before it left in the output folder.
enum class Stage {
  light_curves,     ///< Photometry to lightcurve-fits.
  sample,           ///< lightcurve-fits to sample, cuts and fields.
  standardisation,  ///< sample to magnitudes and standardisation.
  systematics,      ///< Shifts of every magnitude for every [[systematic]].
  intercept,        ///< magnitudes to a_b, standardised, covariance, budget and influence.
  scans,            ///< How a_b moves.
  join              ///< a_b to H0, and the ladder block.
};

std::string name_of(Stage stage);

struct RunOptions {
  Stage first = Stage::light_curves;
  Stage last = Stage::join;
  /// Do the stages even where their results are there already (the single-stage commands).
  bool again = false;
  /// Throw away what is in the output folder first.
  bool afresh = false;
  /// Told before each stage what happens to it: "light curves", "kept from before".
  std::function<void(const std::string& stage, const std::string& what)> say;
};

/// Does the stages asked for, keeping what is finished, and writes summary.json and provenance.json.
///
/// A stage is done again if anything it depends on has changed: settings, input tables, the program. What later stages
/// had left is removed then, so that the folder never holds results that do not belong together. Input files that
/// changed under finished results are refused (InputError) unless `afresh`.
/// Throws InputError, OutputError, NoResultError, and Interrupted on request; finished work stays.
void run_stages(const RunFile& run, const RunOptions& options = {});

}  // namespace thirdrung
