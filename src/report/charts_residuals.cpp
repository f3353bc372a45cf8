#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "report/chart_spec.h"
#include "report/charts_sky.h"
#include "report/digits.h"
#include "report/residual_axes.h"

namespace thirdrung {
namespace {

using nlohmann::json;
using Member = double SupernovaRow::*;

struct Against {
  const char* id;
  const char* title;
  const char* axis;
  const char* field;
  const char* error;  // "" if none is drawn
  Member member;
  Member error_member;
  const char* per;
  const char* what;
  const char* parameter;  ///< Of shared_errors(), "" for none.
};

Chart residual_chart(const ChartInput& input, const Against& against, const Range& vertical) {
  const auto x = used_values(input.all, against.member);
  const auto r = used_values(input.all, &SupernovaRow::residual),
             re = used_values(input.all, &SupernovaRow::residual_error);
  const auto xe = against.error_member ? used_values(input.all, against.error_member) : std::vector<double>{};
  Direction axis{against.axis, range_of(x, xe), false, false, nullptr, ""};
  if (std::string(against.id) == "residual-redshift") axis = redshift_axis(input.all);
  Panel panel;
  panel.y = residual_axis(vertical);
  panel.marks = {level_mark(0), supernova_errors(input, against.field, "r", "re", false)};
  if (*against.error) panel.marks.push_back(supernova_errors(input, against.field, "r", against.error, true));
  panel.marks.push_back(supernova_points(input, against.field, "r"));
  for (const json& mark : mean_marks("means")) panel.marks.push_back(mark);
  json spec = panel_spec(input, axis, {panel});
  show_supernovae(spec, fmt::format("datum.used && isValid(datum.r) && isValid(datum.{})", against.field));
  add_rows(spec, "means", mean_rows(x, r, re, 6, against.what));
  json fields = {"name", "survey_name", against.field};
  if (*against.error) fields.push_back(against.error);
  fields.push_back("r");
  fields.push_back("re");
  return {against.id,
          against.title,
          slope_text(x, r, re, against.per, shared_errors(input, against.parameter)),
          "third",
          270,
          spec,
          {{"fields", fields}},
          ""};
}

/// One column a survey, its supernovae spread sideways, its weighted mean beside them.
Chart survey_chart(const ChartInput& input, const Range& vertical) {
  json spec = bare_spec(input);
  json means = json::array(), names = json::array(), order = json::array();
  for (std::size_t k = 0; k < input.all.surveys.size(); ++k) {
    double sum = 0, mean = 0;
    long long count = 0;
    for (const SupernovaRow& row : input.all.rows) {
      if (!row.used || row.survey != input.all.surveys[k] || !(row.residual_error > 0) || !std::isfinite(row.residual))
        continue;
      const double weight = 1 / (row.residual_error * row.residual_error);
      sum += weight, mean += weight * row.residual, ++count;
    }
    if (count == 0) continue;
    order.push_back(k);
    names.push_back(input.all.surveys[k]);
    means.push_back({{"k", k},
                     {"y", rounded(mean / sum, 6)},
                     {"e", rounded(1 / std::sqrt(sum), 6)},
                     {"tip", fmt::format("{}\nmean {} mag\n{}", input.all.surveys[k],
                                         signed_with_error(mean / sum, 1 / std::sqrt(sum)),
                                         counted(count, "supernova", "supernovae"))}});
  }
  spec["scales"].push_back({{"name", "survey_label"}, {"type", "ordinal"}, {"domain", order}, {"range", names}});
  spec["scales"].push_back({{"name", "x"}, {"type", "band"}, {"range", "width"}, {"domain", order}});
  spec["scales"].push_back({{"name", "y"},
                            {"type", "linear"},
                            {"range", "height"},
                            {"domain", {vertical.low, vertical.high}},
                            {"reverse", true},
                            {"zero", false}});
  spec["axes"] = {
      {{"scale", "x"},
       {"orient", "bottom"},
       {"title", "survey"},
       {"labelLimit", {{"signal", "bandwidth('x') - 4"}}},
       {"ticks", false},
       {"encode", {{"labels", {{"update", {{"text", {{"signal", "scale('survey_label', datum.value)"}}}}}}}}}},
      {{"scale", "y"},
       {"orient", "left"},
       {"title", residual_title},
       {"grid", true},
       {"format", ".1f"},
       {"minExtent", 34},
       {"tickCount", {{"signal", "ceil(height / 45)"}}}}};
  // A golden-section sequence spreads the points evenly without chance; the mean stands to the right of them.
  const std::string spread = "signal:0";
  json points = supernova_points(input, spread, "r"), errors = supernova_errors(input, spread, "r", "re", false),
       averages = mean_marks("means");
  const json sideways = {{"scale", "x"},
                         {"field", "survey"},
                         {"offset", {{"signal", "bandwidth('x') * (0.08 + 0.62 * ((datum.i * 0.618034) % 1))"}}}};
  points["encode"]["update"]["x"] = sideways;
  errors["encode"]["update"]["x"] = sideways;
  for (json& mark : averages)
    mark["encode"]["update"]["x"] = {{"scale", "x"}, {"field", "k"}, {"offset", {{"signal", "bandwidth('x') * 0.86"}}}};
  spec["marks"] = {level_mark(0), errors, points, averages[0], averages[1]};
  show_supernovae(spec, "datum.used && isValid(datum.r)");
  add_rows(spec, "means", means);
  return {"residual-survey",
          "Survey",
          "Open squares: weighted mean of each survey.",
          "third",
          270,
          spec,
          {{"fields", {"name", "survey_name", "r", "re"}}},
          ""};
}

}  // namespace

ChartSection residual_section(const ChartInput& input) {
  ChartSection section{"residuals",
                       "What is left over, and whether it hangs on anything",
                       "A trend in one of these is a correction not made, or a selection. Slopes are weighted fits "
                       "with the errors drawn.",
                       {}};
  if (!has_residuals(input.all)) return section;
  const Range vertical = residual_range(input.all);
  const Against list[] = {
      {"residual-redshift", "Redshift", "", "z", "", &SupernovaRow::z_flow, nullptr, "per unit of z", "z", ""},
      {"residual-stretch", "Stretch", "stretch s", "s", "se", &SupernovaRow::s, &SupernovaRow::s_error, "per unit of s",
       "s", "alpha"},
      {"residual-colour", "Colour", "colour c (mag)", "c", "ce", &SupernovaRow::c, &SupernovaRow::c_error, "per mag",
       "c", "beta"},
      {"residual-mass", "Host mass", "host mass, log₁₀ (M / M☉)", "mass", "masse", &SupernovaRow::host_log_mass,
       &SupernovaRow::host_log_mass_error, "per dex", "log M", ""},
      {"residual-phase", "Phase of the first point", "rest-frame phase of first point (d)", "p0", "",
       &SupernovaRow::first_phase, nullptr, "per day", "phase", ""},
      {"residual-chi2", "Light-curve fit", "χ² / degree of freedom of the light-curve fit", "chir", "", nullptr,
       nullptr, "per unit of χ²/dof", "χ²/dof", ""},
  };
  for (Against against : list) {
    SupernovaRows with_ratio;
    if (against.member == nullptr) {
      // χ² per degree of freedom is no column of its own; put in place of χ² in a copy.
      with_ratio = input.all;
      for (SupernovaRow& row : with_ratio.rows) row.chi2 = row.dof > 0 ? row.chi2 / row.dof : SupernovaRow::missing;
      against.member = &SupernovaRow::chi2;
    }
    const ChartInput source{input.run, with_ratio.rows.empty() ? input.all : with_ratio};
    const auto x = used_values(source.all, against.member);
    if (std::any_of(x.begin(), x.end(), [](double v) { return std::isfinite(v); }))
      section.charts.push_back(residual_chart(source, against, vertical));
  }
  const bool several =
      input.all.surveys.size() > 1 || (input.all.surveys.size() == 1 && !input.all.surveys.front().empty());
  if (several) section.charts.push_back(survey_chart(input, vertical));
  const auto ra = used_values(input.all, &SupernovaRow::ra);
  if (std::any_of(ra.begin(), ra.end(), [](double v) { return std::isfinite(v); }))
    section.charts.push_back(residual_sky_chart(input));
  return section;
}

}  // namespace thirdrung
