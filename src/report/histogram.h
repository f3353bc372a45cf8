#pragma once

#include <vector>

#include "report/run_tables.h"
#include "report/supernova_rows.h"

namespace thirdrung {

/// Numbers of supernovae in bins of one measured quantity, and what the fitted population predicts for them.
struct Histogram {
  double low = 0, step = 1;
  std::vector<double> counts;
  double high() const { return low + step * static_cast<double>(counts.size()); }

  /// The fitted Gaussian in supernovae a bin at the places `x`: as it is, and as it shows through each supernova's own
  /// error. Empty where the run fits no population.
  std::vector<double> x, intrinsic, seen;

  /// Highest bin or curve.
  double top() const;
};

/// Of the supernovae used, at least three with the quantity known. The step is round, about 2 IQR / n^(1/3) (Freedman &
/// Diaconis 1981, Z. Wahrsch. verw. Geb. 57, 453).
/// @param error_member its error, or nullptr for none.
/// @param mean,width parameters of the fitted population; NaN for none.
Histogram make_histogram(const SupernovaRows& all, double SupernovaRow::*member, double SupernovaRow::*error_member,
                         double mean, double width);

}  // namespace thirdrung
