// The corrections for stretch, colour and host mass: the magnitudes without each of them, and with it.
#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "report/chart_spec.h"
#include "report/digits.h"
#include "report/residual_axes.h"

namespace thirdrung {
namespace {

using nlohmann::json;
using Member = double SupernovaRow::*;

struct Correction {
  const char* id;
  const char* title;
  const char* axis;
  const char* field;
  const char* error;
  const char* without;  ///< Field of the residual with this correction taken back (page_data.cpp).
  Member member, error_member;
  const char* parameter;
  const char* symbol;
  const char* per;
};

const Correction corrections[] = {
    {"relation-stretch", "Stretch", "stretch s", "s", "se", "rs", &SupernovaRow::s, &SupernovaRow::s_error, "alpha",
     "α", "per unit of s"},
    {"relation-colour", "Colour", "colour c (mag)", "c", "ce", "rc", &SupernovaRow::c, &SupernovaRow::c_error, "beta",
     "β", "per mag"},
    {"relation-mass", "Host mass", "host mass, log₁₀ (M / M☉)", "mass", "masse", "rm", &SupernovaRow::host_log_mass,
     &SupernovaRow::host_log_mass_error, "gamma", "γ", "per dex"},
};

/// The fitted relation that the residuals follow while the correction is not made: -α (s - 1), +β c, -γ (P - ½).
json relation_rows(const Correction& correction, double value, const Range& range) {
  json rows = json::array();
  const std::string name = correction.parameter;
  if (name == "gamma") {
    // Drawn as the step it is, at log M = 10.
    for (const double x : {range.low, 10.0, 10.0, range.high}) rows.push_back({{"x", x}, {"y", 0.0}});
    rows[0]["y"] = rows[1]["y"] = value / 2;
    rows[2]["y"] = rows[3]["y"] = -value / 2;
    return rows;
  }
  for (const double x : {range.low, range.high})
    rows.push_back({{"x", x}, {"y", name == "alpha" ? -value * (x - 1) : value * x}});
  return rows;
}

/// "Slope ..." in the middle of a sentence.
std::string lower_case_slope(std::string text) {
  if (!text.empty()) text.front() = 's';
  return text;
}

Chart relation_chart(const ChartInput& input, const Correction& correction) {
  const Measured parameter = input.run.summary.parameter(correction.parameter);
  const auto x = used_values(input.all, correction.member), xe = used_values(input.all, correction.error_member);
  const auto r = used_values(input.all, &SupernovaRow::residual),
             re = used_values(input.all, &SupernovaRow::residual_error);
  std::vector<double> before;
  for (const SupernovaRow& row : input.all.rows) {
    if (row.used) before.push_back(residual_without(row, correction.parameter, parameter.value));
  }
  const Range across = range_of(x, xe);
  Panel without, with;
  without.y = residual_axis(range_of(before, re));
  without.y.title = fmt::format("without {} (mag)", correction.symbol);
  without.share = 1.25;
  without.marks = {line_mark("relation", "@ink", 1.6),
                   supernova_errors(input, correction.field, correction.without, "re", false),
                   supernova_errors(input, correction.field, correction.without, correction.error, true),
                   supernova_points(input, correction.field, correction.without)};
  with.y = residual_axis(residual_range(input.all));
  with.y.title = fmt::format("with {} (mag)", correction.symbol);
  with.marks = {level_mark(0), supernova_errors(input, correction.field, "r", "re", false),
                supernova_errors(input, correction.field, "r", correction.error, true),
                supernova_points(input, correction.field, "r")};
  for (const json& mark : mean_marks("means")) with.marks.push_back(mark);
  json spec = panel_spec(input, {correction.axis, across}, {without, with});
  show_supernovae(spec, fmt::format("datum.used && isValid(datum.r) && isValid(datum.{})", correction.field));
  add_rows(spec, "relation", relation_rows(correction, parameter.value, across));
  add_rows(spec, "means", mean_rows(x, r, re, 6, correction.axis));
  return {
      correction.id,
      correction.title,
      fmt::format("{} = {}. With the correction: {}", correction.symbol, with_error(parameter.value, parameter.error),
                  lower_case_slope(slope_text(x, r, re, correction.per, shared_errors(input, correction.parameter)))),
      "third",
      430,
      spec,
      {{"fields", {"name", "survey_name", correction.field, correction.error, correction.without, "r", "re"}}},
      ""};
}

}  // namespace

double residual_without(const SupernovaRow& row, const std::string& parameter, double value) {
  if (parameter == "alpha") return row.residual - value * (row.s - 1);
  if (parameter == "beta") return row.residual + value * row.c;
  return row.residual - value * (row.host_mass_probability - 0.5);
}

ChartSection standardisation_section(const ChartInput& input) {
  ChartSection section{
      "standardisation",
      "The corrections, before and after",
      "Above, residuals with one correction taken back, and the relation fitted; below, with it. Brighter upward.",
      {}};
  if (!has_residuals(input.all)) return section;
  for (const Correction& correction : corrections) {
    if (!std::isfinite(input.run.summary.parameter(correction.parameter).value)) continue;
    const auto x = used_values(input.all, correction.member);
    if (std::any_of(x.begin(), x.end(), [](double v) { return std::isfinite(v); }))
      section.charts.push_back(relation_chart(input, correction));
  }
  return section;
}

}  // namespace thirdrung
