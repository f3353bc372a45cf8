#include "report/charts_sky.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "report/digits.h"
#include "report/sky_map.h"
#include "report/spec_parts.h"

namespace thirdrung {
namespace {

using nlohmann::json;

/// Lines of the map as rows of one data set, told apart by `line`.
json map_rows() {
  json rows = json::array();
  int number = 0;
  for (const MapLine& line : sky_map_lines()) {
    for (const MapPoint& point : line.points)
      rows.push_back({{"line", number}, {"kind", line.kind}, {"x", rounded(point.x, 5)}, {"y", rounded(point.y, 5)}});
    ++number;
  }
  return rows;
}

json label(double ra, double dec, const std::string& text) {
  const MapPoint point = on_sky_map(ra, dec);
  return {{"x", rounded(point.x, 5)}, {"y", rounded(point.y, 5)}, {"text", text}};
}

/// Empty map: scales that keep the two axes alike, outline, grid, plane of the Galaxy, labels.
json sky_spec(const ChartInput& input) {
  json spec = bare_spec(input);
  // The map is twice as wide as it is high; the smaller side sets the scale.
  spec["signals"].push_back({{"name", "radius"}, {"update", "min(width / 5.7, height / 2.9)"}});
  spec["scales"].push_back({{"name", "x"},
                            {"type", "linear"},
                            {"zero", false},
                            {"domain", {-1, 1}},
                            {"range", {{"signal", "[width / 2 - radius, width / 2 + radius]"}}}});
  spec["scales"].push_back({{"name", "y"},
                            {"type", "linear"},
                            {"zero", false},
                            {"domain", {-1, 1}},
                            {"range", {{"signal", "[height / 2 + radius, height / 2 - radius]"}}}});
  add_rows(spec, "map", map_rows());
  add_rows(spec, "labels",
           {label(120, 0, "120°"), label(240, 0, "240°"), label(60, 0, "60°"), label(300, 0, "300°"),
            label(180, 30, "+30°"), label(180, 60, "+60°"), label(180, -30, "−30°"), label(180, -60, "−60°")});
  spec["marks"] = {{{"type", "group"},
                    {"interactive", false},
                    {"from", {{"facet", {{"name", "one"}, {"data", "map"}, {"groupby", {"line", "kind"}}}}}},
                    {"marks",
                     {{{"type", "line"},
                       {"interactive", false},
                       {"from", {{"data", "one"}}},
                       {"encode",
                        {{"update",
                          {{"x", {{"scale", "x"}, {"field", "x"}}},
                           {"y", {{"scale", "y"}, {"field", "y"}}},
                           {"stroke", {{"signal", "datum.kind === 2 ? '@muted' : '@rule'"}}},
                           {"strokeDash", {{"signal", "datum.kind === 2 ? [5, 3] : [1, 0]"}}},
                           {"strokeWidth", {{"signal", "datum.kind === 1 ? 0.7 : 1.2"}}}}}}}}}}},
                   {{"type", "text"},
                    {"interactive", false},
                    {"from", {{"data", "labels"}}},
                    {"encode",
                     {{"update",
                       {{"x", {{"scale", "x"}, {"field", "x"}}},
                        {"y", {{"scale", "y"}, {"field", "y"}}},
                        {"dy", {{"value", -3}}},
                        {"dx", {{"value", 3}}},
                        {"text", {{"field", "text"}}},
                        {"fontSize", {{"value", 10}}},
                        {"fill", {{"value", "@muted"}}}}}}}}};
  return spec;
}

json diverging_scale(double largest) {
  return {{"name", "tone"},
          {"type", "linear"},
          {"clamp", true},
          {"zero", false},
          {"domain", {-largest, 0, largest}},
          {"range", {"@low", "@middle", "@high"}}};
}

json tone_legend(const std::string& title) {
  return {{"fill", "tone"},     {"title", title},        {"orient", "bottom"},    {"direction", "horizontal"},
          {"type", "gradient"}, {"gradientLength", 180}, {"gradientThickness", 9}};
}

/// Discs of the rows of "field" that together cover most of the map: its area is 4π in units of the radius squared.
json field_discs(std::size_t rows) {
  const double cell = 4 * 3.14159265 / static_cast<double>(std::max<std::size_t>(1, rows));
  return {{"type", "symbol"},
          {"from", {{"data", "field"}}},
          {"encode",
           {{"update",
             {{"x", {{"scale", "x"}, {"field", "x"}}},
              {"y", {{"scale", "y"}, {"field", "y"}}},
              {"shape", {{"value", "circle"}}},
              {"size", {{"signal", fmt::format("{} * radius * radius * 0.6", cell)}}},
              {"fill", {{"scale", "tone"}, {"field", "v"}}}}}}}};
}

}  // namespace

Chart residual_sky_chart(const ChartInput& input) {
  json spec = sky_spec(input);
  show_supernovae(spec, "datum.used && isValid(datum.r) && isValid(datum.mx)");
  std::vector<double> sizes = used_values(input.all, &SupernovaRow::residual);
  for (double& value : sizes) value = std::isfinite(value) ? std::abs(value) : 0;
  std::sort(sizes.begin(), sizes.end());
  const double largest = sizes.empty() ? 0.2 : std::max(0.05, sizes[sizes.size() * 95 / 100]);
  spec["scales"].push_back(diverging_scale(largest));
  spec["legends"] = {tone_legend("residual (mag): left brighter, right fainter")};
  json points = supernova_points(input, "mx", "my");
  points["encode"]["enter"] = {{"fill", {{"scale", "tone"}, {"field", "r"}}}, {"shape", {{"value", "circle"}}}};
  const double unit = input.all.rows.size() > 1000 ? 5 : 16;
  points["encode"]["update"]["size"] = {{"signal", fmt::format("{} * (0.7 + min(4, abs(datum.r / datum.re)))", unit)}};
  points["encode"]["update"]["stroke"] = {{"signal", "picked && mask[datum.i] ? '@ink' : '@muted'"}};
  spec["marks"].push_back(points);
  return {"residual-sky",
          "Position on the sky",
          "Equal-area map (Hammer), right ascension 180° in the middle, east to the left; dashed: plane of the Galaxy. "
          "Larger symbols: farther from zero in units of their error.",
          "two-thirds",
          300,
          spec,
          {{"fields", {"name", "survey_name", "ra", "dec", "r", "re"}}},
          ""};
}

Chart sky_halves_chart(const ChartInput& input) {
  const Table& table = *input.run.sky_halves;
  const auto ra = table.reals("ra"), dec = table.reals("dec"), delta = table.reals("delta_ab"),
             error = table.reals("delta_ab_error");
  const auto caution = strings_or_empty(table, "caution");
  json rows = json::array(), csv = json::array();
  double largest = 1e-6;
  for (std::size_t i = 0; i < ra.size(); ++i) {
    csv.push_back({ra[i], dec[i], delta[i], error[i], caution[i]});
    if (!std::isfinite(delta[i])) continue;
    largest = std::max(largest, std::abs(delta[i]));
    // The half about the opposite pole is the other one.
    for (const double sign : {1.0, -1.0}) {
      const double longitude = sign > 0 ? ra[i] : std::fmod(ra[i] + 180, 360);
      const MapPoint point = on_sky_map(longitude, sign * dec[i]);
      rows.push_back(
          {{"x", rounded(point.x, 5)},
           {"y", rounded(point.y, 5)},
           {"v", rounded(sign * delta[i], 6)},
           {"tip", fmt::format("pole at right ascension {:.0f}°, declination {}°\nΔa_B = {} ({:.1f} σ){}", longitude,
                               signed_fixed(sign * dec[i], 0), signed_with_error(sign * delta[i], error[i]),
                               std::abs(delta[i]) / error[i], caution[i].empty() ? "" : "\ncaution: " + caution[i])}});
    }
  }
  json spec = sky_spec(input);
  add_rows(spec, "field", rows);
  spec["scales"].push_back(diverging_scale(largest));
  spec["legends"] = {tone_legend("Δa_B, half about the pole minus the other")};
  spec["marks"].insert(spec["marks"].begin(), field_discs(rows.size()));
  return {"sky-halves",
          "Halves of the sky",
          "a_B of the half of the sky about each direction minus that of the other half; hover for errors. Equal-area "
          "map (Hammer), right ascension 180° in the middle, east to the left; dashed: plane of the Galaxy.",
          "full",
          400,
          spec,
          {{"header", {"ra (deg)", "dec (deg)", "delta_ab", "delta_ab_error", "caution"}}, {"rows", csv}},
          ""};
}

ChartSection velocity_section(const ChartInput& input) {
  ChartSection section{
      "velocities", "The velocity field on the sky", "Which way the correction for peculiar velocities pulls.", {}};
  if (!input.run.fields) return section;
  const Table& table = *input.run.fields;
  const auto ra = table.reals("ra"), dec = table.reals("dec"), v = table.reals("v_pec");
  json rows = json::array(), csv = json::array();
  double largest = 1;
  for (std::size_t i = 0; i < ra.size(); ++i) {
    if (!std::isfinite(ra[i]) || !std::isfinite(dec[i]) || !std::isfinite(v[i])) continue;
    const MapPoint point = on_sky_map(ra[i], dec[i]);
    rows.push_back({{"x", rounded(point.x, 5)},
                    {"y", rounded(point.y, 5)},
                    {"v", rounded(v[i], 5)},
                    {"tip", fmt::format("right ascension {:.1f}°, declination {}°\nv_pec {} km/s", ra[i],
                                        signed_fixed(dec[i], 1), signed_fixed(v[i], 0))}});
    csv.push_back({ra[i], dec[i], v[i]});
    largest = std::max(largest, std::abs(v[i]));
  }
  json spec = sky_spec(input);
  add_rows(spec, "field", rows);
  spec["scales"].push_back(diverging_scale(largest));
  spec["legends"] = {tone_legend("peculiar velocity (km/s): left towards us, right away")};
  const json discs = field_discs(rows.size());
  spec["marks"].insert(spec["marks"].begin(), discs);
  if (std::any_of(input.all.rows.begin(), input.all.rows.end(),
                  [](const SupernovaRow& row) { return row.used && std::isfinite(row.ra); })) {
    show_supernovae(spec, "datum.used && isValid(datum.mx)");
    json points = supernova_points(input, "mx", "my");
    points["encode"]["enter"] = {{"fill", {{"value", "@ink"}}}, {"shape", {{"value", "circle"}}}};
    points["encode"]["update"]["size"] = {{"value", 9}};
    spec["marks"].push_back(points);
  }
  section.charts.push_back(
      {"velocity-field",
       "Radial peculiar velocity at the reference redshift",
       "Equal-area map (Hammer), right ascension 180° in the middle, east to the left. Dots: the supernovae used.",
       "full",
       400,
       spec,
       {{"header", {"ra (deg)", "dec (deg)", "v_pec (km/s)"}}, {"rows", csv}},
       ""});
  return section;
}

}  // namespace thirdrung
