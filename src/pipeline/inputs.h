#pragma once

#include <memory>
#include <string>
#include <vector>

#include "light/passband_catalogue.h"
#include "lightcurve/photometry.h"
#include "pipeline/run_file.h"
#include "sample/supernova.h"
#include "template/trained_template.h"

namespace thirdrung {

// Reading what a run file names. Each function throws InputError at the place of the run file, or of the table, that
// is wrong.

PassbandCatalogue read_catalogue(const RunFile& run);
TrainedTemplate read_run_template(const RunFile& run);

/// All supernovae of all surveys, Milky Way reddening filled in and scaled, and the rows that cannot be used.
struct SurveySupernovae {
  std::vector<Supernova> supernovae;
  std::vector<SetAside> set_aside;
};
/// Throws InputError if two surveys use one name for objects more than 60 arcsec apart.
SurveySupernovae read_all_supernovae(const RunFile& run);

/// All light curves of all surveys, and the supernovae of which the photometry cannot be used.
Photometry read_all_photometry(const RunFile& run, const PassbandCatalogue& catalogue);

/// The redshift options of the run, the velocity field read.
RedshiftOptions read_redshift_options(const RunFile& run);

/// One file that a result depends on.
struct InputChecksum {
  std::string file;  ///< As the run file (or the passband catalogue) has it.
  std::string sha256;
  bool operator==(const InputChecksum&) const = default;
};

/// Checksums of the files that the light curves depend on: template, passbands, standard star, photometry, supernovae,
/// dust maps; and of those that later stages add: velocity fields, other templates, calibrators.
std::vector<InputChecksum> checksums_of_lightcurve_inputs(const RunFile& run);
std::vector<InputChecksum> checksums_of_later_inputs(const RunFile& run);

/// One text that changes whenever one of them does.
std::string digest(const std::vector<InputChecksum>& inputs);

}  // namespace thirdrung
