// Histograms of what was measured, with the populations that the standardisation fitted.
#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "report/chart_spec.h"
#include "report/digits.h"
#include "report/histogram.h"
#include "report/spec_parts.h"

namespace thirdrung {
namespace {

using nlohmann::json;
using Member = double SupernovaRow::*;

struct Population {
  const char* id;
  const char* title;
  const char* axis;
  const char* field;
  Member member, error_member;
  const char* mean;  ///< Parameters of the fitted Gaussian, "" if the run fits none.
  const char* width;
};

const Population populations[] = {
    {"population-stretch", "Stretch", "stretch s", "s", &SupernovaRow::s, &SupernovaRow::s_error, "s_mean", "s_width"},
    {"population-colour", "Colour", "colour c (mag)", "c", &SupernovaRow::c, &SupernovaRow::c_error, "c_mean",
     "c_width"},
    {"population-redshift", "Redshift", "redshift z (flow-corrected)", "z", &SupernovaRow::z_flow, nullptr, "", ""},
    {"population-mass", "Host mass", "host mass, log₁₀ (M / M☉)", "mass", &SupernovaRow::host_log_mass, nullptr, "",
     ""},
};

json curve_rows(const std::vector<double>& x, const std::vector<double>& y) {
  json rows = json::array();
  for (std::size_t i = 0; i < x.size(); ++i) rows.push_back({{"x", rounded(x[i], 6)}, {"y", rounded(y[i], 6)}});
  return rows;
}

json bar_mark(const std::string& data, const std::string& colour, bool picked) {
  json mark = {{"type", "rect"},
               {"from", {{"data", data}}},
               {"encode",
                {{"update",
                  {{"x", {{"scale", "x"}, {"field", "b0"}, {"offset", 0.5}}},
                   {"x2", {{"scale", "x"}, {"field", "b1"}, {"offset", -0.5}}},
                   {"y", {{"scale", "y"}, {"field", "count"}}},
                   {"y2", {{"scale", "y"}, {"value", 0}}},
                   {"fill", {{"value", colour}}},
                   {"fillOpacity", {{"signal", picked ? "picked ? 0.95 : 0" : "picked ? 0.3 : 0.75"}}}}}}}};
  if (picked)
    mark["interactive"] = false;
  else
    mark["name"] = "bars";
  return mark;
}

Chart population_chart(const ChartInput& input, const Population& population) {
  const Measured mean = input.run.summary.parameter(population.mean),
                 width = input.run.summary.parameter(population.width);
  const Histogram histogram =
      make_histogram(input.all, population.member, population.error_member, mean.value, width.value);
  const bool fitted = !histogram.x.empty();
  Panel panel;
  panel.y = {
      fmt::format("supernovae per {:.3g}", histogram.step), {0, 1.06 * histogram.top()}, false, false, nullptr, ""};
  panel.marks = {bar_mark("bins", "@bar", false), bar_mark("picked_bins", "@bar", true), line_mark("seen", "@ink", 2),
                 line_mark("intrinsic", "@ink", 1.2, true)};
  json spec = panel_spec(input, {population.axis, {histogram.low, histogram.high()}}, {panel});
  show_supernovae(spec, fmt::format("datum.used && isValid(datum.{})", population.field));
  const json bin = {{"type", "bin"},
                    {"field", population.field},
                    {"extent", {histogram.low, histogram.high()}},
                    {"step", histogram.step},
                    {"nice", false},
                    {"as", {"b0", "b1"}}};
  const json count = {
      {"type", "aggregate"}, {"groupby", {"b0", "b1"}}, {"ops", {"count"}}, {"as", {"count"}}, {"fields", {nullptr}}};
  const json tip = {{"type", "formula"},
                    {"as", "tip"},
                    {"expr",
                     "format(datum.b0, '.4~g') + ' to ' + format(datum.b1, '.4~g') + '\\n' + datum.count + "
                     "(datum.count === 1 ? ' supernova' : ' supernovae')"}};
  spec["data"].push_back({{"name", "bins"}, {"source", "shown"}, {"transform", {bin, count, tip}}});
  spec["data"].push_back({{"name", "picked_bins"},
                          {"source", "shown"},
                          {"transform", {{{"type", "filter"}, {"expr", "picked && mask[datum.i]"}}, bin, count}}});
  add_rows(spec, "intrinsic", curve_rows(histogram.x, histogram.intrinsic));
  add_rows(spec, "seen", curve_rows(histogram.x, histogram.seen));
  const std::string caption =
      fitted
          ? fmt::format(
                "Fitted population: mean {}, width {} (dashed); as it shows through the errors of measurement (line).",
                with_error(mean.value, mean.error), with_error(width.value, width.error))
          : std::string();
  return {population.id,   population.title, caption, "half", 260, spec, {{"fields", {"name", population.field}}},
          population.field};
}

}  // namespace

ChartSection population_section(const ChartInput& input) {
  ChartSection section{
      "populations",
      "The sample",
      "What kinds of supernovae the answer stands on. Brush over bars to mark their supernovae everywhere.",
      {}};
  for (const Population& population : populations) {
    const auto values = used_values(input.all, population.member);
    if (std::count_if(values.begin(), values.end(), [](double v) { return std::isfinite(v); }) >= 3)
      section.charts.push_back(population_chart(input, population));
  }
  return section;
}

}  // namespace thirdrung
