#include <algorithm>
#include <cmath>

#include "report/chart_spec.h"
#include "report/digits.h"
#include "report/residual_axes.h"

namespace thirdrung {
namespace {

using nlohmann::json;

/// The fitted relation at the supernovae's redshifts: standardised magnitude less residual.
json relation_rows(const SupernovaRows& all) {
  std::vector<std::pair<double, double>> points;
  for (const SupernovaRow& row : all.rows) {
    if (row.used && std::isfinite(row.residual) && std::isfinite(row.m_standard) && row.z_flow > 0)
      points.emplace_back(row.z_flow, row.m_standard - row.residual);
  }
  std::sort(points.begin(), points.end());
  json rows = json::array();
  // A few hundred points draw the curve as well as thousands.
  const std::size_t step = std::max<std::size_t>(1, points.size() / 300);
  for (std::size_t i = 0; i < points.size(); i += step)
    rows.push_back({{"x", points[i].first}, {"y", rounded(points[i].second, 8)}});
  if (!points.empty()) rows.push_back({{"x", points.back().first}, {"y", rounded(points.back().second, 8)}});
  return rows;
}

Chart hubble_chart(const ChartInput& input) {
  const SupernovaRows& all = input.all;
  Panel magnitudes;
  magnitudes.y = {
      "standardised m_B (mag)",
      range_of(used_values(all, &SupernovaRow::m_standard), used_values(all, &SupernovaRow::m_standard_error)),
      false,
      true,
      nullptr,
      ""};
  magnitudes.share = 1.7;
  magnitudes.marks = {line_mark("relation", "@ink", 1), supernova_errors(input, "z", "m0", "m0e", false),
                      supernova_points(input, "z", "m0")};
  Panel residuals;
  residuals.y = residual_axis(residual_range(all));
  residuals.marks = {level_mark(0), supernova_errors(input, "z", "r", "re", false), supernova_points(input, "z", "r")};
  for (const json& mark : mean_marks("means")) residuals.marks.push_back(mark);
  json spec = panel_spec(input, redshift_axis(all), {magnitudes, residuals});
  show_supernovae(spec, "datum.used && isValid(datum.r) && isValid(datum.z)");
  add_rows(spec, "relation", relation_rows(all));
  add_rows(spec, "means",
           mean_rows(used_values(all, &SupernovaRow::z_flow), used_values(all, &SupernovaRow::residual),
                     used_values(all, &SupernovaRow::residual_error), 8, "z"));
  return {"hubble",
          "Magnitude against redshift",
          "Above: magnitudes corrected for stretch, colour and host, with the fitted relation. Below: what is left of "
          "each. Open squares: weighted means of neighbours in redshift, with their errors.",
          "full",
          560,
          spec,
          {{"fields", {"name", "survey_name", "z", "ze", "m0", "m0e", "r", "re"}}},
          ""};
}

}  // namespace

ChartSection hubble_section(const ChartInput& input) {
  ChartSection section{"hubble-diagram",
                       "The magnitude-redshift relation",
                       "Does one straight relation describe the sample over the whole range?",
                       {}};
  if (has_residuals(input.all)) section.charts.push_back(hubble_chart(input));
  return section;
}

}  // namespace thirdrung
