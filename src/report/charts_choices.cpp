// How the answer moves when a choice is changed: the redshift range, and everything else that was scanned.
#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <set>

#include "report/charts_sky.h"
#include "report/digits.h"
#include "report/spec_parts.h"

namespace thirdrung {
namespace {

using nlohmann::json;

json band_axis(const char* scale, const char* orient, const char* title) {
  return {{"scale", scale},  {"orient", orient}, {"title", title},   {"ticks", false},
          {"domain", false}, {"format", "~g"},   {"labelPadding", 6}};
}

json text_mark(const char* data, const char* field, double shift, double size, const char* colour) {
  return {{"type", "text"},
          {"interactive", false},
          {"from", {{"data", data}}},
          {"encode",
           {{"update",
             {{"x", {{"scale", "x"}, {"field", "z_max"}, {"band", 0.5}}},
              {"y", {{"scale", "y"}, {"field", "z_min"}, {"band", 0.5}, {"offset", shift}}},
              {"align", {{"value", "center"}}},
              {"baseline", {{"value", "middle"}}},
              {"fontSize", {{"value", size}}},
              {"fill", {{"value", colour}}},
              {"text", {{"field", field}}}}}}}};
}

Chart grid_chart(const ChartInput& input) {
  const Table& table = *input.run.zrange_grid;
  const auto z_min = table.reals("z_min"), z_max = table.reals("z_max"), shift = table.reals("delta_ab"),
             error = table.reals("delta_ab_error");
  const auto number = reals_or_missing(table, "supernovae");
  json rows = json::array(), csv = json::array();
  double largest = 1e-6;
  std::set<double> lows, highs;
  for (std::size_t i = 0; i < z_min.size(); ++i) {
    csv.push_back({z_min[i], z_max[i], number[i], shift[i], error[i]});
    if (!std::isfinite(shift[i])) continue;
    lows.insert(z_min[i]);
    highs.insert(z_max[i]);
    largest = std::max(largest, std::abs(shift[i]));
    // In thousandths, the size of the error; the range of reference has neither shift nor error.
    const bool reference = error[i] == 0;
    const int decimals = decimals_for(1000 * error[i]);
    rows.push_back(
        {{"z_min", z_min[i]},
         {"z_max", z_max[i]},
         {"shift", rounded(shift[i], 5)},
         {"reference", reference},
         {"text", reference ? "0" : signed_fixed(1000 * shift[i], decimals)},
         {"error_text", reference ? "" : "± " + fixed(1000 * error[i], decimals)},
         {"tip", fmt::format("{:.4g} < z < {:.4g}\nΔa_B = {}\n{:.0f} supernovae", z_min[i], z_max[i],
                             reference ? "0 (reference)" : signed_with_error(shift[i], error[i]), number[i])}});
  }
  json spec = bare_spec(input);
  add_rows(spec, "cells", rows);
  spec["scales"].push_back({{"name", "x"}, {"type", "band"}, {"range", "width"}, {"domain", highs}, {"padding", 0.03}});
  spec["scales"].push_back(
      {{"name", "y"}, {"type", "band"}, {"range", "height"}, {"domain", lows}, {"reverse", true}, {"padding", 0.04}});
  spec["scales"].push_back({{"name", "tone"},
                            {"type", "linear"},
                            {"zero", false},
                            {"domain", {-largest, 0, largest}},
                            {"range", {"@low", "@middle", "@high"}}});
  spec["axes"] = {band_axis("x", "bottom", "z_max"), band_axis("y", "left", "z_min")};
  spec["marks"].push_back({{"type", "rect"},
                           {"from", {{"data", "cells"}}},
                           {"encode",
                            {{"update",
                              {{"x", {{"scale", "x"}, {"field", "z_max"}}},
                               {"width", {{"scale", "x"}, {"band", 1}}},
                               {"y", {{"scale", "y"}, {"field", "z_min"}}},
                               {"height", {{"scale", "y"}, {"band", 1}}},
                               {"fill", {{"scale", "tone"}, {"field", "shift"}}},
                               {"stroke", {{"signal", "datum.reference ? '@ink' : '@paper'"}}},
                               {"strokeWidth", {{"signal", "datum.reference ? 1.6 : 0"}}}}}}}});
  const bool room = highs.size() <= 12 && lows.size() <= 16;
  if (room) {
    spec["marks"].push_back(text_mark("cells", "text", -6, 12, "@ink"));
    spec["marks"].push_back(text_mark("cells", "error_text", 8, 10, "@ink"));
  }
  const int height = room ? std::max(180, 70 + 38 * static_cast<int>(lows.size())) : 420;
  return {"zrange-grid",
          "Redshift range",
          "Δa_B against the reference range and the error of that difference, both in thousandths. Outlined: the "
          "reference.",
          highs.size() <= 6 ? "third" : "full",
          height,
          spec,
          {{"header", {"z_min", "z_max", "supernovae", "delta_ab", "delta_ab_error"}}, {"rows", csv}},
          ""};
}

Chart scan_chart(const ChartInput& input) {
  const Table& table = *input.run.scans;
  const auto axes = table.strings("scan"), settings = table.strings("setting"),
             cautions = strings_or_empty(table, "caution");
  const auto shift = table.reals("delta_ab"), error = table.reals("delta_ab_error"),
             number = reals_or_missing(table, "supernovae");
  json rows = json::array(), csv = json::array(), order = json::array(), labels = json::array();
  std::string last;
  std::vector<double> shown, errors;
  for (std::size_t i = 0; i < shift.size(); ++i) {
    csv.push_back({axes[i], settings[i], number[i], shift[i], error[i], cautions[i]});
    if (axes[i] == "sky_halves" && input.run.sky_halves) continue;  // They have a map of their own.
    if (axes[i] != last || order.empty()) {
      // A line of its own names the choice; its settings stand below.
      order.push_back(fmt::format("h{}", i));
      labels.push_back(axes[i]);
      last = axes[i];
    }
    const std::string key = fmt::format("s{}", i);
    order.push_back(key);
    labels.push_back(settings[i]);
    if (!std::isfinite(shift[i])) continue;
    const double sigma = error[i] > 0 ? std::abs(shift[i]) / error[i] : 0;
    shown.push_back(shift[i]);
    errors.push_back(error[i]);
    rows.push_back({{"key", key},
                    {"x", rounded(shift[i], 6)},
                    {"e", rounded(error[i], 6)},
                    {"far", sigma > 2},
                    {"caution", !cautions[i].empty()},
                    {"text", signed_with_error(shift[i], error[i]) + (cautions[i].empty() ? "" : "  !")},
                    {"count", std::isfinite(number[i]) ? fmt::format("{:.0f}", number[i]) : ""},
                    {"tip", fmt::format("{}: {}\nΔa_B = {} ({:.1f} σ of the difference)\n{:.0f} supernovae{}", axes[i],
                                        settings[i], signed_with_error(shift[i], error[i]), sigma, number[i],
                                        cautions[i].empty() ? "" : "\ncaution: " + cautions[i])}});
  }
  Range range = range_of(shown, errors);
  const double largest = std::max(std::abs(range.low), std::abs(range.high));
  json spec = bare_spec(input);
  add_rows(spec, "rows", rows);
  // On a narrow screen the numbers on the right give way; they are in the hover.
  spec["signals"].push_back({{"name", "room"}, {"update", "width < 320 ? 0 : 190"}});
  spec["scales"].push_back({{"name", "x"},
                            {"type", "linear"},
                            {"zero", false},
                            {"domain", {-largest, largest}},
                            {"range", {{"signal", "[0, width - room]"}}}});
  spec["scales"].push_back(
      {{"name", "y"}, {"type", "point"}, {"range", "height"}, {"domain", order}, {"padding", 0.6}});
  spec["scales"].push_back({{"name", "label"}, {"type", "ordinal"}, {"domain", order}, {"range", labels}});
  const std::string heading = "slice(datum.value, 0, 1) === 'h'";
  spec["axes"] = {{{"scale", "x"},
                   {"orient", "bottom"},
                   {"title", "Δa_B, with the error of the difference"},
                   {"grid", true},
                   {"tickCount", {{"signal", "ceil((width - room) / 90)"}}},
                   {"format", "+.3~f"}},
                  {{"scale", "y"},
                   {"orient", "left"},
                   {"ticks", false},
                   {"domain", false},
                   {"labelLimit", 210},
                   {"labelPadding", 8},
                   {"encode",
                    {{"labels",
                      {{"update",
                        {{"text", {{"signal", "scale('label', datum.value)"}}},
                         {"fontWeight", {{"signal", heading + " ? 600 : 400"}}},
                         {"fill", {{"signal", heading + " ? '@ink' : '@muted'"}}}}}}}}}}};
  const json y = {{"scale", "y"}, {"field", "key"}};
  const auto text = [&](const char* field, const char* x, const char* align) {
    return json{{"type", "text"},
                {"interactive", false},
                {"from", {{"data", "rows"}}},
                {"encode",
                 {{"update",
                   {{"x", {{"signal", x}}},
                    {"y", y},
                    {"align", {{"value", align}}},
                    {"baseline", {{"value", "middle"}}},
                    {"fontSize", {{"value", 11}}},
                    {"fontWeight", {{"signal", "datum.far ? 600 : 400"}}},
                    {"opacity", {{"signal", "room > 0 ? 1 : 0"}}},
                    {"fill", {{"value", "@ink"}}},
                    {"text", {{"field", field}}}}}}}};
  };
  const json colour = {{"signal", "datum.far ? '@alarm' : '@bar'"}};
  spec["marks"] = {{{"type", "rule"},
                    {"interactive", false},
                    {"encode",
                     {{"update",
                       {{"x", {{"scale", "x"}, {"value", 0}}},
                        {"y", {{"value", 0}}},
                        {"y2", {{"signal", "height"}}},
                        {"stroke", {{"value", "@ink"}}}}}}}},
                   {{"type", "rule"},
                    {"from", {{"data", "rows"}}},
                    {"encode",
                     {{"update",
                       {{"x", {{"scale", "x"}, {"signal", "datum.x - datum.e"}}},
                        {"x2", {{"scale", "x"}, {"signal", "datum.x + datum.e"}}},
                        {"y", y},
                        {"stroke", colour},
                        {"strokeWidth", {{"value", 2}}}}}}}},
                   {{"type", "symbol"},
                    {"from", {{"data", "rows"}}},
                    {"encode",
                     {{"update",
                       {{"x", {{"scale", "x"}, {"field", "x"}}},
                        {"y", y},
                        {"size", {{"value", 60}}},
                        {"shape", {{"signal", "datum.far ? 'diamond' : 'circle'"}}},
                        {"fill", {{"signal", "datum.caution ? '@paper' : datum.far ? '@alarm' : '@bar'"}}},
                        {"stroke", colour},
                        {"strokeWidth", {{"value", 1.6}}}}}}}},
                   text("text", "width - 34", "right"),
                   text("count", "width", "right")};
  return {"scans",
          "Other choices",
          "Each row changes one choice; right: Δa_B and the number of supernovae. Diamonds are more than twice the "
          "error of the difference from zero; open symbols carry a caution (hover).",
          input.run.zrange_grid ? "two-thirds" : "full",
          90 + 19 * static_cast<int>(order.size()),
          spec,
          {{"header", {"scan", "setting", "supernovae", "delta_ab", "delta_ab_error", "caution"}}, {"rows", csv}},
          ""};
}

}  // namespace

ChartSection choices_section(const ChartInput& input) {
  ChartSection section{
      "choices",
      "What moves the answer",
      "The samples behind two settings overlap, so each error is that of the difference, not of either value.",
      {}};
  if (input.run.scans) section.charts.push_back(scan_chart(input));
  if (input.run.zrange_grid) section.charts.push_back(grid_chart(input));
  if (input.run.sky_halves) section.charts.push_back(sky_halves_chart(input));
  return section;
}

}  // namespace thirdrung
