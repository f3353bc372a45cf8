#pragma once

#include <nlohmann/json.hpp>
#include <string>
#include <vector>

#include "report/chart_spec.h"

namespace thirdrung {

/// One bar of a bar chart.
struct Bar {
  std::string label, text, tip;  ///< At the left; at the right; under the pointer.
  double value = 0;
  bool statistical = false;  ///< Drawn in the colour of statistical errors.
};

/// Horizontal bars, the largest on top, with the number at the right.
/// @param room left for the numbers [px].
nlohmann::json bar_spec(const ChartInput& input, std::vector<Bar> bars, const std::string& title, int room = 120);

/// Axis at the left of rows that the scale "y" places and the scale "label" names.
nlohmann::json row_label_axis();

}  // namespace thirdrung
