#pragma once

#include <filesystem>
#include <string>
#include <vector>

#include "pipeline/error_scale.h"
#include "pipeline/input_file.h"
#include "training/run_training.h"

namespace thirdrung {

/// A training file: what a template is to be trained on, and how (docs/template.md).
struct TrainingFile {
  struct Survey {
    std::string name;
    InputFile photometry, supernovae;
    bool check = false;  ///< Not trained on; fitted with the finished template.
    ErrorScale error_scale;
  };
  std::filesystem::path path;
  std::string content;  ///< As read, for the provenance.
  std::vector<Survey> surveys;
  InputFile catalogue, standard_star, spectra;
  SpectraOptions spectra_options;
  DustLaw dust_law = DustLaw::fitzpatrick99;
  double r_v = 3.1;
  TrainingSetup setup;
};

/// Reads a training file; throws InputError for a wrong value or an unknown key, the nearest known one named.
TrainingFile read_training_file(const std::filesystem::path& path);

/// Where a training run leaves its results.
struct TrainingOutput {
  std::filesystem::path template_file;  ///< FITS.
  std::filesystem::path
      folder;  ///< Tables of the run: training-set, left-out, out-of-fold fits, cross-validation, offsets.
};

/// Reads the data, trains, and writes template and tables.
TrainingResult train_from_file(const TrainingFile& file, const TrainingOutput& output, int threads);

}  // namespace thirdrung
