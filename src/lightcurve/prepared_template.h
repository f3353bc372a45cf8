#pragma once

#include <optional>

#include "template/band_table.h"
#include "template/template_grid.h"

namespace thirdrung {

/// A template made ready for the fits of many supernovae: its grid, and the rest-frame B light curve.
class PreparedTemplate {
 public:
  explicit PreparedTemplate(const SpectralTemplate& model);

  const SpectralTemplate& model() const { return grid_.model(); }
  const TemplateGrid& grid() const { return grid_; }

  /// SpectralTemplate::dm15_b from a table: decline of B in the 15 rest-frame days after its maximum [mag].
  double dm15_b(double s, double c) const;

 private:
  TemplateGrid grid_;
  std::optional<BandTable> b_band_;  ///< Absent if the gauge wavelengths are not multiples of a step.
};

}  // namespace thirdrung
