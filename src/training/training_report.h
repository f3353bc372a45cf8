#pragma once

#include <filesystem>
#include <span>

#include "training/run_training.h"

namespace thirdrung {

/// Writes training-report.md and its figures (SVG) into a folder, which is made if need be: what the trained template
/// looks like, how well it predicts supernovae that it has not seen, and who was left out.
///
/// @param light_curves all that were fitted out of fold, in any order; they give the held-out points their passbands.
/// Throws OutputError if a file cannot be written.
void write_training_report(const TrainingResult& result, std::span<const LightCurve> light_curves,
                           const std::filesystem::path& folder);

/// The text of the report alone.
std::string training_report_text(const TrainingResult& result, std::span<const LightCurve> light_curves);

}  // namespace thirdrung
