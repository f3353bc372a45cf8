#pragma once

#include <filesystem>
#include <string>
#include <utility>
#include <vector>

#include "template/trained_template.h"

namespace thirdrung {

// A template with its uncertainty as one FITS file; docs/template-file.md lists its parts.

struct TemplateFileOptions {
  bool coefficients_as_float = false;  ///< Φ, Γ and K in single precision; the gauge then holds to about 1e-6.
  bool uncertainty_as_float = true;    ///< Modes of the covariance and responses to calibration in single precision.
};

/// Writes .fits or .fits.gz, by the ending, atomically; equal templates give equal bytes.
///
/// Does not ask whether the gauge holds. Throws OutputError if the file cannot be written, std::logic_error if the
/// arrays of the template do not fit its grids.
void write_template(const TrainedTemplate& trained, const std::filesystem::path& path,
                    const TemplateFileOptions& options = {});

/// Largest error of the gauge, in each of its own units (GaugeErrors), of a template that is accepted.
inline constexpr double template_gauge_tolerance = 1e-4;

/// Reads a template written by write_template().
///
/// Throws InputError, which names the part and the fault, for a file that is not a template or of another layout, for
/// a part that is absent or whose shape does not fit its grids, for values that are not finite, and for a template
/// that violates its gauge: its m_B, s and c would not be what they are called.
TrainedTemplate read_template(const std::filesystem::path& path);

/// What a person asks about a template first.
struct TemplateDescription {
  std::string name;
  double phase_min = 0, phase_max = 0;            ///< Rest-frame phase over stretch [d].
  double wavelength_min = 0, wavelength_max = 0;  ///< Rest frame [angstrom].
  int coefficients = 0;                           ///< Of Φ, Γ and K together.
  bool has_scatter = false;
  int covariance_modes = 0;
  std::vector<std::string> calibration_passbands;  ///< Passbands whose calibration the template answers to.
  double gauge_error = 0;                          ///< The largest of gauge_errors().
  std::vector<std::pair<std::string, std::string>> provenance;
};
TemplateDescription describe(const TrainedTemplate& trained);

}  // namespace thirdrung
