#pragma once

#include <nlohmann/json.hpp>
#include <string>
#include <vector>

#include "report/run_tables.h"
#include "report/supernova_rows.h"

namespace thirdrung {

/// One chart of the page: a Vega specification and what stands around it.
///
/// Conventions between the specifications and the page's script (src/report/page/charts.js):
/// - data set "sn" is filled by the page from the one table of supernovae that all charts share; fields as in
/// page_data.cpp;
/// - signals `picked` (a selection stands) and `mask` (one flag a supernova) are set by the page;
/// - marks named "points" stand for one supernova each (datum.i is its row) and take part in hover, click, brush,
/// keyboard;
/// - marks named "bars" with datum.b0 and datum.b1 stand for the supernovae whose `brush_field` lies between the two;
/// - any other mark may carry datum.tip, the text of its hover;
/// - colours are written "@name" and replaced by the page's theme.
struct Chart {
  std::string id;
  std::string title;
  std::string caption;
  std::string size = "half";  ///< "full", "two-thirds", "half", "third": the share of the page's width.
  int height = 300;           ///< Pixels.
  nlohmann::json spec;
  /// {"fields": [...]} of the supernova table, or {"header": [...], "rows": [[...]]}.
  nlohmann::json csv;
  std::string brush_field;
};

/// A group of charts with a heading; left out of the page if it has no chart.
struct ChartSection {
  std::string id;
  std::string title;
  std::string lead;  ///< What question these charts answer.
  std::vector<Chart> charts;
};

struct ChartInput {
  const RunTables& run;
  const SupernovaRows& all;
};

/// Residual of a supernova with one correction taken back: `parameter` alpha, beta or gamma, of that value.
double residual_without(const SupernovaRow& row, const std::string& parameter, double value);

ChartSection hubble_section(const ChartInput& input);
ChartSection residual_section(const ChartInput& input);
ChartSection standardisation_section(const ChartInput& input);
ChartSection population_section(const ChartInput& input);
ChartSection ladder_section(const ChartInput& input);
ChartSection choices_section(const ChartInput& input);
ChartSection budget_section(const ChartInput& input);
ChartSection influence_section(const ChartInput& input);
ChartSection velocity_section(const ChartInput& input);

}  // namespace thirdrung
