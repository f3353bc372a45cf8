// Histograms of what was measured, with the populations that the standardisation fitted.
#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "report/chart_spec.h"
#include "report/digits.h"
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

struct Bins {
  double low, step;
  std::size_t count;
};

/// A round step, about as wide as 2 IQR / n^(1/3) (Freedman & Diaconis 1981, Z. Wahrsch. verw. Geb. 57, 453).
Bins bins_for(std::vector<double> values) {
  std::sort(values.begin(), values.end());
  const std::size_t n = values.size();
  const double spread = values[n * 3 / 4] - values[n / 4];
  const double span = values.back() - values.front();
  double step = std::max(2 * spread / std::cbrt(static_cast<double>(n)), span / 60);
  if (!(step > 0)) step = 1;
  const double decade = std::pow(10.0, std::floor(std::log10(step)));
  const double lead = step / decade;
  step = decade * (lead < 1.5 ? 1 : lead < 3.5 ? 2 : lead < 7.5 ? 5 : 10);
  const double low = std::floor(values.front() / step) * step;
  return {low, step, static_cast<std::size_t>(std::floor((values.back() - low) / step)) + 1};
}

double gaussian(double x, double mean, double width) {
  return std::exp(-0.5 * (x - mean) * (x - mean) / (width * width)) / (width * std::sqrt(2 * 3.14159265358979));
}

/// Numbers a bin that the fitted population predicts: as it is, or as it shows through each supernova's own error.
json population_rows(const std::vector<double>& errors, double mean, double width, const Bins& bins,
                     bool through_errors) {
  json rows = json::array();
  const double high = bins.low + bins.step * static_cast<double>(bins.count);
  for (int k = 0; k <= 160; ++k) {
    const double x = bins.low + (high - bins.low) * k / 160.0;
    double sum = 0;
    for (const double error : errors)
      sum += gaussian(x, mean, through_errors && std::isfinite(error) ? std::hypot(width, error) : width);
    rows.push_back({{"x", rounded(x, 6)}, {"y", rounded(sum * bins.step, 6)}});
  }
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
  std::vector<double> values, errors;
  for (const SupernovaRow& row : input.all.rows) {
    if (!row.used || !std::isfinite(row.*population.member)) continue;
    values.push_back(row.*population.member);
    errors.push_back(population.error_member ? row.*population.error_member : 0);
  }
  const Bins bins = bins_for(values);
  std::vector<double> counts(bins.count);
  for (const double value : values)
    counts[std::min(bins.count - 1, static_cast<std::size_t>((value - bins.low) / bins.step))] += 1;
  double top = *std::max_element(counts.begin(), counts.end());
  const Measured mean = input.run.summary.parameter(population.mean),
                 width = input.run.summary.parameter(population.width);
  const bool fitted = std::isfinite(mean.value) && width.value > 0;
  json intrinsic = json::array(), seen = json::array();
  if (fitted) {
    intrinsic = population_rows(errors, mean.value, width.value, bins, false);
    seen = population_rows(errors, mean.value, width.value, bins, true);
    for (const json& row : intrinsic) top = std::max(top, row["y"].get<double>());
  }
  const double high = bins.low + bins.step * static_cast<double>(bins.count);
  Panel panel;
  panel.y = {fmt::format("supernovae per {:.3g}", bins.step), {0, 1.06 * top}, false, false, nullptr, ""};
  panel.marks = {bar_mark("bins", "@bar", false), bar_mark("picked_bins", "@bar", true), line_mark("seen", "@ink", 2),
                 line_mark("intrinsic", "@ink", 1.2, true)};
  json spec = panel_spec(input, {population.axis, {bins.low, high}}, {panel});
  show_supernovae(spec, fmt::format("datum.used && isValid(datum.{})", population.field));
  const json bin = {{"type", "bin"}, {"field", population.field}, {"extent", {bins.low, high}}, {"step", bins.step},
                    {"nice", false}, {"as", {"b0", "b1"}}};
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
  add_rows(spec, "intrinsic", intrinsic);
  add_rows(spec, "seen", seen);
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
