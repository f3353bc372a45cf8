#pragma once

#include <filesystem>
#include <string>
#include <vector>

#include "hubbleflow/covariance_model.h"
#include "pipeline/run_file.h"
#include "pipeline/saved_shifts.h"
#include "tables/table.h"

namespace thirdrung {

/// The shifts of a set of supernovae.
struct SystematicShifts {
  std::vector<std::string> supernovae;
  std::vector<SystematicShift> shifts;  ///< Each in the order of `supernovae`.
};

/// Shift of every standardised magnitude for every [[systematic]] of the run, each moved by +1 sigma.
///
/// Whatever an input touches is done again with it moved: light curves fitted, redshifts, standardisation; the set of
/// supernovae stays. A passband's zero point or wavelength moves the light curves in that passband, and, through the
/// template's stored response to its training set, every other one with it. alpha, beta, gamma and sigma_int are
/// fitted again, or held (RunFile::refit_with_systematics). An input that moves the covariance (sigma_v) shifts all
/// magnitudes of the Hubble flow besides by what its new weights do to a_B (weight_shift.h). Calibrators that pass the
/// quality rules are moved along, after the Hubble flow in the order of the shifts.
/// @param fits table "lightcurve-fits"; @param sample table "sample"; @param magnitudes table "magnitudes".
/// @param saved shifts found before the run was stopped; new ones are added.
SystematicShifts find_systematic_shifts(const RunFile& run, const Table& fits, const Table& sample,
                                        const Table& magnitudes, const SavedShifts& saved);

/// `systematic-shifts.fits`: the image "shifts" (one row a systematic), the tables "systematics" and "supernovae".
void write_shifts(const SystematicShifts& shifts, const std::filesystem::path& path);
SystematicShifts read_shifts(const std::filesystem::path& path);
/// The shifts in the order of other supernovae; throws InputError naming the first that has none.
std::vector<SystematicShift> shifts_for(const SystematicShifts& shifts, const std::vector<std::string>& supernovae);

}  // namespace thirdrung
