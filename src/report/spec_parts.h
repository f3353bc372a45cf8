#pragma once

#include <nlohmann/json.hpp>
#include <string>
#include <vector>

#include "report/chart_spec.h"

namespace thirdrung {

/// The pieces that the page's Vega specifications are put together from.

struct Range {
  double low = 0, high = 1;
};

/// Axis and scale of one direction.
struct Direction {
  std::string title;  ///< With the unit.
  Range range;
  bool logarithmic = false;
  bool brighter_up = false;                               ///< Magnitudes: small numbers at the top.
  nlohmann::json values = nlohmann::json::value_t::null;  ///< Tick positions, if not to be chosen by Vega.
  std::string format = {};                                ///< Of the tick labels (d3-format), "" for Vega's choice.
};

/// One plot area; several stand above each other and share their x axis.
struct Panel {
  Direction y;
  double share = 1;  ///< Of the height.
  nlohmann::json marks = nlohmann::json::array();
};

/// Specification with the page's signals and scales for surveys, but no marks.
nlohmann::json bare_spec(const ChartInput& input);
/// Specification of panels above each other; their marks use scales "x" and "y".
nlohmann::json panel_spec(const ChartInput& input, const Direction& x, const std::vector<Panel>& panels);
/// Adds a data set of literal rows.
void add_rows(nlohmann::json& spec, const std::string& name, nlohmann::json rows);
/// Adds the supernovae for which `condition` (a Vega expression of datum) holds, as data set "shown".
void show_supernovae(nlohmann::json& spec, const std::string& condition);

/// One symbol a supernova of data set "shown" at fields x and y (or "signal:..." expressions), coloured by survey.
nlohmann::json supernova_points(const ChartInput& input, const std::string& x, const std::string& y);
/// Bars of +- the field `error`, vertical or horizontal.
nlohmann::json supernova_errors(const ChartInput& input, const std::string& x, const std::string& y,
                                const std::string& error, bool horizontal);
/// Polyline through data set `data` with fields x, y.
nlohmann::json line_mark(const std::string& data, const std::string& colour, double width, bool dashed = false);
/// Straight horizontal line at y.
nlohmann::json level_mark(double y);
/// Open squares with error bars from data set `data` (x, y, e, tip).
nlohmann::json mean_marks(const std::string& data);

/// Rows {x, y, e, tip} of weighted means in bins of x, for mean_marks().
nlohmann::json mean_rows(const std::vector<double>& x, const std::vector<double>& y, const std::vector<double>& error,
                         std::size_t bins, const std::string& what);

/// Smallest range that holds all finite values (widened by their errors, where given), with a margin of 5 %.
Range range_of(const std::vector<double>& values, const std::vector<double>& errors = {});

/// Values of one member for the supernovae that are used.
std::vector<double> used_values(const SupernovaRows& all, double SupernovaRow::*member);

/// "Slope +0.012 ± 0.034 mag per unit (0.4 σ from zero)." of a trend.
/// @param shared covariances of the errors of x and y, where both contain the same measurement: the slope that they
/// alone make is then told too, and the significance counted from it. Empty: none.
std::string slope_text(const std::vector<double>& x, const std::vector<double>& y, const std::vector<double>& error,
                       const std::string& per, const std::vector<double>& shared = {});

/// Covariance of a residual with the measured s ("alpha") or c ("beta") of the used supernovae, since the residual
/// contains both: cov(m + α s - β c, s or c) with the covariances of the light-curve fit. Empty for any other name.
std::vector<double> shared_errors(const ChartInput& input, const std::string& parameter);

}  // namespace thirdrung
