#pragma once

#include <string>
#include <vector>

#include "report/chart_spec.h"
#include "report/drawing.h"

namespace thirdrung {

/// One static figure: whether the run has what it needs, how high it is, how it is drawn.
struct Figure {
  std::string name;
  bool possible = false;
  double height = 0;  ///< Points, for the width it is made for.
  void (*draw)(Drawing&, const ChartInput&) = nullptr;
};

Figure hubble_figure(const ChartInput& input, double width);
Figure residual_figure(const ChartInput& input, double width);
Figure standardisation_figure(const ChartInput& input, double width);
Figure population_figure(const ChartInput& input, double width);
Figure calibrator_figure(const ChartInput& input, double width);
Figure scan_figure(const ChartInput& input, double width);
Figure budget_figure(const ChartInput& input, double width);

/// Number of a supernova's survey in the order of SupernovaRows::surveys.
std::size_t survey_number(const SupernovaRows& all, const SupernovaRow& row);
/// Names of the surveys with their symbols in one line or more, from the upper left corner; returns the height taken.
double draw_survey_key(Drawing& drawing, const SupernovaRows& all, double x, double y, double width);

}  // namespace thirdrung
