// The error budget, the derivatives behind it, and the pull of single supernovae.
#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <numeric>

#include "report/bar_chart.h"
#include "report/chart_spec.h"
#include "report/digits.h"
#include "report/spec_parts.h"

namespace thirdrung {
namespace {

using nlohmann::json;

Chart budget_chart(const ChartInput& input) {
  const Table& table = *input.run.budget;
  const auto sources = table.strings("source"), kinds = strings_or_empty(table, "kind"),
             sizes = strings_or_empty(table, "size");
  const auto ab = table.reals("ab_contribution"), mag = reals_or_missing(table, "mag_contribution"),
             h0 = reals_or_missing(table, "h0_percent");
  std::vector<Bar> bars;
  json csv = json::array();
  for (std::size_t i = 0; i < ab.size(); ++i) {
    csv.push_back({sources[i], kinds[i], sizes[i], ab[i], mag[i], h0[i]});
    if (!std::isfinite(ab[i])) continue;
    const double size = std::abs(ab[i]);
    const std::string percent = std::isfinite(h0[i]) ? fmt::format("   {} %", fixed(std::abs(h0[i]), 2)) : "";
    bars.push_back({sources[i], fixed(size, 5) + percent,
                    fmt::format("{} ({})\ninput: {}\na_B {}\n{} mag\nH0 {} %", sources[i], kinds[i], sizes[i],
                                fixed(size, decimals_for(size)), fixed(std::abs(mag[i]), 4), fixed(std::abs(h0[i]), 2)),
                    size, kinds[i].rfind("stat", 0) == 0});
  }
  const int height = 70 + 22 * static_cast<int>(bars.size());
  return {"budget",
          "Error budget",
          "Amber: statistical; blue: systematic. Right: error of a_B, and of H0 in percent. Sources add in squares, "
          "but for their correlations.",
          "half",
          height,
          bar_spec(input, std::move(bars), "error of a_B"),
          {{"header", {"source", "kind", "size", "ab_contribution", "mag_contribution", "h0_percent"}}, {"rows", csv}},
          ""};
}

Chart derivative_chart(const ChartInput& input) {
  const Table& table = *input.run.calibration_derivatives;
  const auto inputs = table.strings("input"), units = strings_or_empty(table, "unit");
  const auto derivative = table.reals("d_ab");
  std::vector<Bar> bars;
  json csv = json::array();
  for (std::size_t i = 0; i < derivative.size(); ++i) {
    csv.push_back({inputs[i], units[i], derivative[i]});
    if (!std::isfinite(derivative[i])) continue;
    const std::string number = signed_fixed(derivative[i], 4);
    bars.push_back(
        {inputs[i], number, fmt::format("{}\nda_B = {} {}", inputs[i], number, units[i]), derivative[i], false});
  }
  const int height = 70 + 17 * static_cast<int>(bars.size());
  return {"derivatives",
          "Lever of each calibration input",
          "Change of a_B for a unit change of one input, all else left as it is.",
          "half",
          height,
          bar_spec(input, std::move(bars), "da_B per unit"),
          {{"header", {"input", "unit", "d_ab"}}, {"rows", csv}},
          ""};
}

json name_marks(const ChartInput& input) {
  std::vector<std::size_t> order(input.all.rows.size());
  std::iota(order.begin(), order.end(), std::size_t{0});
  std::erase_if(order, [&](std::size_t i) {
    return !std::isfinite(input.all.rows[i].influence) || !(input.all.rows[i].z_flow > 0);
  });
  std::stable_sort(order.begin(), order.end(), [&](std::size_t a, std::size_t b) {
    return std::abs(input.all.rows[a].influence) > std::abs(input.all.rows[b].influence);
  });
  json rows = json::array();
  // Names that would run into each other are left to the hover.
  const Range across = range_of(used_values(input.all, &SupernovaRow::z_flow)),
              up = range_of(used_values(input.all, &SupernovaRow::influence));
  std::vector<const SupernovaRow*> named;
  for (const std::size_t i : order) {
    const SupernovaRow& row = input.all.rows[i];
    const bool free = std::none_of(named.begin(), named.end(), [&](const SupernovaRow* other) {
      return std::abs(other->z_flow - row.z_flow) < 0.14 * (across.high - across.low) &&
             std::abs(other->influence - row.influence) < 0.08 * (up.high - up.low);
    });
    if (!free) continue;
    if (named.size() == 6) break;
    named.push_back(&row);
    rows.push_back({{"x", row.z_flow}, {"y", row.influence}, {"text", row.name}});
  }
  return rows;
}

}  // namespace

ChartSection budget_section(const ChartInput& input) {
  ChartSection section{"error-budget", "Where the error comes from", "What to improve first.", {}};
  if (input.run.budget) section.charts.push_back(budget_chart(input));
  if (input.run.calibration_derivatives) section.charts.push_back(derivative_chart(input));
  return section;
}

ChartSection influence_section(const ChartInput& input) {
  ChartSection section{
      "influence", "The pull of single supernovae", "How far a_B moves if one supernova is left out.", {}};
  if (!input.run.influence) return section;
  std::vector<double> shift, error, z;
  for (const SupernovaRow& row : input.all.rows) {
    if (!std::isfinite(row.influence) || !(row.z_flow > 0)) continue;
    shift.push_back(row.influence);
    error.push_back(row.influence_error);
    z.push_back(row.z_flow);
  }
  if (shift.empty()) return section;
  Panel panel;
  panel.y = {"Δa_B without it", range_of(shift, error), false, false, nullptr, "+~g"};
  panel.marks = {level_mark(0), supernova_errors(input, "z", "infl", "infle", false),
                 supernova_points(input, "z", "infl")};
  panel.marks.push_back({{"type", "text"},
                         {"interactive", false},
                         {"from", {{"data", "names"}}},
                         {"encode",
                          {{"update",
                            {{"x", {{"scale", "x"}, {"field", "x"}}},
                             {"y", {{"scale", "y"}, {"field", "y"}}},
                             {"dx", {{"signal", "scale('x', datum.x) > width - 130 ? -7 : 7"}}},
                             {"align", {{"signal", "scale('x', datum.x) > width - 130 ? 'right' : 'left'"}}},
                             {"baseline", {{"value", "middle"}}},
                             {"limit", {{"value", 120}}},
                             {"fontSize", {{"value", 11}}},
                             {"fill", {{"value", "@ink"}}},
                             {"text", {{"field", "text"}}}}}}}});
  json spec = panel_spec(input, {"redshift z (flow-corrected)", range_of(z)}, {panel});
  show_supernovae(spec, "isValid(datum.infl) && isValid(datum.z)");
  add_rows(spec, "names", name_marks(input));
  section.charts.push_back({"influence",
                            "Δa_B without one supernova",
                            "Errors are those of the difference. Some that pull most are named.",
                            "full",
                            320,
                            spec,
                            {{"fields", {"name", "survey_name", "z", "infl", "infle", "w"}}},
                            ""});
  return section;
}

}  // namespace thirdrung
