#pragma once

#include <filesystem>
#include <optional>
#include <string>

#include "pipeline/run_file.h"

namespace thirdrung {

// Blind analysis (the practice of Zhang et al. 2017, MNRAS 471, 2254): a hidden constant, made from the run's phrase,
// is added to a_B at one place, the standardised magnitudes that leave the standardisation. Everything after it (a_B,
// single intercepts, scans, H0, the ladder block, the page) is then blind alike, and every difference is true. It hides
// the answer from eyes, not from someone who computes it anew from the light-curve fits.

//
// Calibrators carry a constant of their own, added at the one place where they are standardised: with a true M_B in
// sight, whose value everyone knows, H0 would be half open. H0 then carries both.

/// The constant in a_B: between -0.02 and 0.02, fixed by the phrase.
double hidden_offset(const std::string& phrase);
/// The constant in the magnitudes of calibrators, and so in their M_B: between -0.1 and 0.1 mag, fixed by the phrase.
double hidden_magnitude(const std::string& phrase);

/// The recorded act of unblinding, `unblinding.json` in the output folder.
struct Unblinding {
  std::string by;               ///< Name given.
  std::string when;             ///< UTC, "2024-05-01T12:00:00Z".
  std::string run_file_sha256;  ///< Of the run file as it then stood.
  std::string inputs;           ///< Digest of all inputs as they then were.
};

std::optional<Unblinding> read_unblinding(const std::filesystem::path& folder);
/// Writes the record; throws InputError if the run is not blind, or was unblinded before.
Unblinding unblind(const RunFile& run, const std::string& by);

/// The constant that results of this run carry now: 0 unless it is blind and not unblinded.
double offset_in_force(const RunFile& run);
/// The same for the calibrators' magnitudes [mag].
double magnitude_in_force(const RunFile& run);
bool is_blind(const RunFile& run);

}  // namespace thirdrung
