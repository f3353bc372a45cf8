#include "report/spec_parts.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "report/digits.h"
#include "report/trend.h"

namespace thirdrung {
namespace {

using nlohmann::json;

json scale_of(const std::string& name, const Direction& direction, const char* range) {
  json scale = {{"name", name},   {"type", direction.logarithmic ? "log" : "linear"},
                {"range", range}, {"zero", false},
                {"nice", false},  {"domain", {direction.range.low, direction.range.high}}};
  if (direction.brighter_up) scale["reverse"] = true;
  return scale;
}

json axis_of(const std::string& scale, const Direction& direction, const char* orient) {
  json axis = {
      {"scale", scale}, {"orient", orient}, {"title", direction.title}, {"grid", true}, {"labelOverlap", true}};
  if (!direction.values.is_null()) axis["values"] = direction.values;
  if (!direction.format.empty()) axis["format"] = direction.format;
  // Ticks as far apart as their labels need.
  if (std::string(orient) == "bottom")
    axis["tickCount"] = {{"signal", "ceil(width / 90)"}};
  else
    axis["tickCount"] = {{"signal", "ceil(height / 45)"}};
  return axis;
}

json place(const std::string& scale, const std::string& field) {
  if (field.rfind("signal:", 0) == 0) return {{"scale", scale}, {"signal", field.substr(7)}};
  return {{"scale", scale}, {"field", field}};
}

std::string expression(const std::string& field) {
  return field.rfind("signal:", 0) == 0 ? fmt::format("({})", field.substr(7)) : fmt::format("datum.{}", field);
}

std::size_t used_count(const SupernovaRows& all) {
  return static_cast<std::size_t>(
      std::count_if(all.rows.begin(), all.rows.end(), [](const SupernovaRow& row) { return row.used; }));
}

}  // namespace

json bare_spec(const ChartInput& input) {
  json surveys = json::array();
  for (std::size_t i = 0; i < input.all.surveys.size(); ++i) surveys.push_back(i);
  json colours = json::array(), shapes = json::array(), sizes = json::array();
  // Vega gives the area of the square around a symbol; these factors make the ink alike.
  const double shape_sizes[] = {1, 0.85, 1.9, 1.5, 1.5, 1.9, 1.9, 1.9};
  const char* const shape_names[] = {"circle", "square",        "triangle-up",    "diamond",
                                     "cross",  "triangle-down", "triangle-right", "triangle-left"};
  for (std::size_t i = 0; i < std::max<std::size_t>(1, input.all.surveys.size()); ++i) {
    // More than eight colours cannot be told apart; the rest share a grey.
    colours.push_back(i < 8 ? fmt::format("@c{}", i) : "@other");
    shapes.push_back(i < 8 ? shape_names[i] : "circle");
    sizes.push_back(i < 8 ? shape_sizes[i] : 1);
  }
  return {{"width", 600},
          {"height", 300},
          {"padding", 3},
          {"autosize", {{"type", "fit"}, {"contains", "padding"}}},
          {"signals", {{{"name", "picked"}, {"value", false}}, {{"name", "mask"}, {"value", json::array()}}}},
          {"data", {{{"name", "sn"}}}},
          {"scales",
           {{{"name", "survey"}, {"type", "ordinal"}, {"domain", surveys}, {"range", colours}},
            {{"name", "shape"}, {"type", "ordinal"}, {"domain", surveys}, {"range", shapes}},
            {{"name", "shape_size"}, {"type", "ordinal"}, {"domain", surveys}, {"range", sizes}}}},
          {"axes", json::array()},
          {"marks", json::array()}};
}

json panel_spec(const ChartInput& input, const Direction& x, const std::vector<Panel>& panels) {
  json spec = bare_spec(input);
  spec["scales"].push_back(scale_of("x", x, "width"));
  double sum = 0;
  for (const Panel& panel : panels) sum += panel.share;
  const double gap = 10;
  const double gaps = gap * static_cast<double>(panels.size() - 1);
  double before = 0;
  for (std::size_t k = 0; k < panels.size(); ++k) {
    const Panel& panel = panels[k];
    const bool last = k + 1 == panels.size();
    const std::string top = fmt::format("(height - {}) * {} + {}", gaps, before / sum, gap * static_cast<double>(k));
    const std::string own_height = fmt::format("(height - {}) * {}", gaps, panel.share / sum);
    spec["signals"].push_back({{"name", fmt::format("top{}", k)}, {"update", top}});
    spec["signals"].push_back({{"name", fmt::format("height{}", k)}, {"update", own_height}});
    before += panel.share;
    json x_axis = axis_of("x", x, "bottom");
    if (!last) {
      x_axis["labels"] = false;
      x_axis.erase("title");
    }
    json y_axis = axis_of("y", panel.y, "left");
    y_axis["minExtent"] = 34;
    spec["marks"].push_back({{"type", "group"},
                             {"name", fmt::format("panel{}", k)},
                             {"encode",
                              {{"update",
                                {{"y", {{"signal", fmt::format("top{}", k)}}},
                                 {"width", {{"signal", "width"}}},
                                 {"height", {{"signal", fmt::format("height{}", k)}}},
                                 {"stroke", {{"value", "@rule"}}}}}}},
                             {"signals", {{{"name", "height"}, {"update", fmt::format("height{}", k)}}}},
                             {"scales", {scale_of("y", panel.y, "height")}},
                             {"axes", {x_axis, y_axis}},
                             {"marks", panel.marks}});
  }
  return spec;
}

void add_rows(json& spec, const std::string& name, json rows) {
  spec["data"].push_back({{"name", name}, {"values", std::move(rows)}});
}

void show_supernovae(json& spec, const std::string& condition) {
  spec["data"].push_back(
      {{"name", "shown"}, {"source", "sn"}, {"transform", {{{"type", "filter"}, {"expr", condition}}}}});
}

json supernova_points(const ChartInput& input, const std::string& x, const std::string& y) {
  const std::size_t count = used_count(input.all);
  const int size = count <= 250 ? 34 : count <= 1000 ? 20 : 9;
  const double opacity = count <= 1000 ? 0.85 : 0.6, rim = count <= 1000 ? 0.7 : 0.2;
  return {
      {"type", "symbol"},
      {"name", "points"},
      {"from", {{"data", "shown"}}},
      {"clip", true},
      {"encode",
       {{"enter",
         {{"shape", {{"scale", "shape"}, {"field", "survey"}}}, {"fill", {{"scale", "survey"}, {"field", "survey"}}}}},
        {"update",
         {{"x", place("x", x)},
          {"y", place("y", y)},
          {"size", {{"scale", "shape_size"}, {"field", "survey"}, {"mult", size}}},
          {"stroke", {{"signal", "picked && mask[datum.i] ? '@ink' : '@paper'"}}},
          {"strokeWidth", {{"value", rim}}},
          {"opacity", {{"signal", fmt::format("picked && !mask[datum.i] ? 0.13 : {}", opacity)}}}}}}}};
}

json supernova_errors(const ChartInput& input, const std::string& x, const std::string& y, const std::string& error,
                      bool horizontal) {
  const std::size_t count = used_count(input.all);
  const double opacity = (count <= 250 ? 0.4 : count <= 1000 ? 0.22 : 0.1) * (horizontal ? 0.7 : 1.0);
  const std::string centre = expression(horizontal ? x : y);
  json update = {{"stroke", {{"scale", "survey"}, {"field", "survey"}}},
                 {"strokeWidth", {{"value", 1}}},
                 {"opacity", {{"signal", fmt::format("picked && !mask[datum.i] ? 0.05 : {}", opacity)}}}};
  const std::string low = fmt::format("{} - datum.{}", centre, error),
                    high = fmt::format("{} + datum.{}", centre, error);
  update["x"] = horizontal ? json{{"scale", "x"}, {"signal", low}} : place("x", x);
  update["y"] = horizontal ? place("y", y) : json{{"scale", "y"}, {"signal", low}};
  if (horizontal)
    update["x2"] = {{"scale", "x"}, {"signal", high}};
  else
    update["y2"] = {{"scale", "y"}, {"signal", high}};
  return {{"type", "rule"},
          {"from", {{"data", "shown"}}},
          {"clip", true},
          {"interactive", false},
          {"encode", {{"update", update}}}};
}

json line_mark(const std::string& data, const std::string& colour, double width, bool dashed) {
  json update = {{"x", {{"scale", "x"}, {"field", "x"}}},
                 {"y", {{"scale", "y"}, {"field", "y"}}},
                 {"stroke", {{"value", colour}}},
                 {"strokeWidth", {{"value", width}}}};
  if (dashed) update["strokeDash"] = {{"value", {5, 4}}};
  return {{"type", "line"},
          {"from", {{"data", data}}},
          {"clip", true},
          {"interactive", false},
          {"encode", {{"update", update}}}};
}

json level_mark(double y) {
  return {{"type", "rule"},
          {"interactive", false},
          {"encode",
           {{"update",
             {{"x", {{"value", 0}}},
              {"x2", {{"signal", "width"}}},
              {"y", {{"scale", "y"}, {"value", y}}},
              {"stroke", {{"value", "@ink"}}},
              {"strokeWidth", {{"value", 1}}}}}}}};
}

json mean_marks(const std::string& data) {
  json bars = {{"type", "rule"},
               {"from", {{"data", data}}},
               {"clip", true},
               {"encode",
                {{"update",
                  {{"x", {{"scale", "x"}, {"field", "x"}}},
                   {"y", {{"scale", "y"}, {"signal", "datum.y - datum.e"}}},
                   {"y2", {{"scale", "y"}, {"signal", "datum.y + datum.e"}}},
                   {"stroke", {{"value", "@ink"}}},
                   {"strokeWidth", {{"value", 1.6}}}}}}}};
  json squares = {{"type", "symbol"},
                  {"from", {{"data", data}}},
                  {"clip", true},
                  {"encode",
                   {{"update",
                     {{"x", {{"scale", "x"}, {"field", "x"}}},
                      {"y", {{"scale", "y"}, {"field", "y"}}},
                      {"shape", {{"value", "square"}}},
                      {"size", {{"value", 58}}},
                      {"fill", {{"value", "@paper"}}},
                      {"stroke", {{"value", "@ink"}}},
                      {"strokeWidth", {{"value", 1.6}}}}}}}};
  return json::array({bars, squares});
}

json mean_rows(const std::vector<double>& x, const std::vector<double>& y, const std::vector<double>& error,
               std::size_t bins, const std::string& what) {
  json rows = json::array();
  for (const BinnedMean& bin : binned_means(x, y, error, bins)) {
    rows.push_back({{"x", rounded(bin.x, 6)},
                    {"y", rounded(bin.mean, 6)},
                    {"e", rounded(bin.error, 6)},
                    {"tip", fmt::format("{} from {:.3g} to {:.3g}\nmean {} mag\n{}", what, bin.low, bin.high,
                                        signed_with_error(bin.mean, bin.error),
                                        counted(static_cast<long long>(bin.points), "supernova", "supernovae"))}});
  }
  return rows;
}

Range range_of(const std::vector<double>& values, const std::vector<double>& errors) {
  double low = INFINITY, high = -INFINITY;
  for (std::size_t i = 0; i < values.size(); ++i) {
    if (!std::isfinite(values[i])) continue;
    const double error = i < errors.size() && std::isfinite(errors[i]) ? errors[i] : 0;
    low = std::min(low, values[i] - error);
    high = std::max(high, values[i] + error);
  }
  if (!(low <= high)) return {0, 1};
  const double margin = high > low ? 0.05 * (high - low) : std::max(0.05 * std::abs(low), 1e-3);
  return {low - margin, high + margin};
}

std::vector<double> used_values(const SupernovaRows& all, double SupernovaRow::*member) {
  std::vector<double> values;
  for (const SupernovaRow& row : all.rows) {
    if (row.used) values.push_back(row.*member);
  }
  return values;
}

std::string slope_text(const std::vector<double>& x, const std::vector<double>& y, const std::vector<double>& error,
                       const std::string& per, const std::vector<double>& shared) {
  const Trend trend = fit_trend(x, y, error);
  if (!std::isfinite(trend.slope)) return "";
  const std::string slope = signed_with_error(trend.slope, trend.slope_error);
  if (shared.empty())
    return fmt::format("Slope {} mag {} ({:.1f} σ from zero).", slope, per, std::abs(trend.slope) / trend.slope_error);
  const double expected = slope_of_shared_errors(x, error, shared);
  return fmt::format("Slope {} mag {}; {} is made by errors of measurement that enter both axes, {:.1f} σ from it.",
                     slope, per, signed_fixed(expected, decimals_for(trend.slope_error)),
                     std::abs(trend.slope - expected) / trend.slope_error);
}

std::vector<double> shared_errors(const ChartInput& input, const std::string& parameter) {
  std::vector<double> result;
  if (parameter != "alpha" && parameter != "beta") return result;
  const double alpha = input.run.summary.parameter("alpha").value, beta = input.run.summary.parameter("beta").value;
  if (!std::isfinite(alpha) || !std::isfinite(beta)) return result;
  for (const SupernovaRow& row : input.all.rows) {
    if (!row.used) continue;
    if (parameter == "alpha")
      result.push_back(row.cov_mb_s + alpha * row.s_error * row.s_error - beta * row.cov_s_c);
    else
      result.push_back(row.cov_mb_c + alpha * row.cov_s_c - beta * row.c_error * row.c_error);
  }
  const bool known = std::any_of(result.begin(), result.end(), [](double v) { return std::isfinite(v); });
  return known ? result : std::vector<double>{};
}

}  // namespace thirdrung
