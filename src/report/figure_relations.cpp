// Static figures of points: the magnitude-redshift relation, residuals, the corrections before and after.
#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "report/digits.h"
#include "report/figure_parts.h"
#include "report/residual_axes.h"
#include "report/trend.h"

namespace thirdrung {
namespace {

using Member = double SupernovaRow::*;

constexpr double left_margin = 44, right_margin = 6, bottom_margin = 26, top_margin = 8;

/// Points with errors of one quantity against another, and weighted means where wanted.
void draw_points(Drawing& drawing, const PlotArea& area, const SupernovaRows& all, Member x,
                 const std::vector<double>& y, Member error, std::size_t means) {
  const auto xs = used_values(all, x), es = used_values(all, error);
  const double radius = xs.size() <= 300 ? 1.9 : xs.size() <= 1000 ? 1.4 : 0.9;
  area.begin_clip(drawing);
  std::size_t k = 0;
  for (const SupernovaRow& row : all.rows) {
    if (!row.used) continue;
    const double value = y[k++];
    if (!std::isfinite(row.*x) || !std::isfinite(value)) continue;
    area.vertical_error(drawing, row.*x, value, row.*error, 0.3, grey);
  }
  k = 0;
  for (const SupernovaRow& row : all.rows) {
    if (!row.used) continue;
    const double value = y[k++];
    if (!std::isfinite(row.*x) || !std::isfinite(value)) continue;
    const std::size_t survey = survey_number(all, row);
    drawing.symbol(survey, area.x(row.*x), area.y(value), radius, series_colour(survey));
  }
  for (const BinnedMean& bin : means > 0 ? binned_means(xs, y, es, means) : std::vector<BinnedMean>{}) {
    area.vertical_error(drawing, bin.x, bin.mean, bin.error, 0.9, ink);
    drawing.square(area.x(bin.x), area.y(bin.mean), 2.4);
  }
  drawing.end_clip();
}

void draw_hubble(Drawing& drawing, const ChartInput& input) {
  const SupernovaRows& all = input.all;
  const double key =
      draw_survey_key(drawing, all, left_margin, top_margin, drawing.width() - left_margin - right_margin);
  const double width = drawing.width() - left_margin - right_margin, top = top_margin + key;
  const double height = drawing.height() - top - bottom_margin - 4;
  const auto m = used_values(all, &SupernovaRow::m_standard), r = used_values(all, &SupernovaRow::residual);
  Direction z = redshift_axis(all);
  z.title = "redshift z";
  const PlotArea above(
      left_margin, top, width, 0.63 * height, z,
      {"m_{B}, standardised (mag)", range_of(m, used_values(all, &SupernovaRow::m_standard_error)), false, true});
  const PlotArea below(left_margin, top + 0.63 * height + 4, width, 0.37 * height, z,
                       {"residual (mag)", residual_range(all), false, true});
  above.frame(drawing, false);
  below.frame(drawing);
  below.level(drawing, 0);
  std::vector<std::pair<double, double>> relation;
  for (const SupernovaRow& row : all.rows) {
    if (row.used && row.z_flow > 0 && std::isfinite(row.residual))
      relation.emplace_back(row.z_flow, row.m_standard - row.residual);
  }
  std::sort(relation.begin(), relation.end());
  std::vector<double> x, y;
  for (const auto& [zs, ms] : relation) x.push_back(above.x(zs)), y.push_back(above.y(ms));
  draw_points(drawing, above, all, &SupernovaRow::z_flow, m, &SupernovaRow::m_standard_error, 0);
  drawing.polyline(x, y, 0.7, ink);
  draw_points(drawing, below, all, &SupernovaRow::z_flow, r, &SupernovaRow::residual_error, 8);
}

struct Quantity {
  Member member;
  const char* title;
  const char* parameter;
  const char* symbol;
};
const Quantity quantities[] = {{&SupernovaRow::s, "stretch s", "alpha", "α"},
                               {&SupernovaRow::c, "colour c (mag)", "beta", "β"},
                               {&SupernovaRow::host_log_mass, "host mass, log_{10} (M / M_{☉})", "gamma", "γ"},
                               {&SupernovaRow::first_phase, "phase of first point (d)", "", ""}};

bool known_for_some(const SupernovaRows& all, Member member) {
  const auto values = used_values(all, member);
  return std::any_of(values.begin(), values.end(), [](double v) { return std::isfinite(v); });
}

std::vector<Quantity> present(const ChartInput& input, bool with_parameter) {
  std::vector<Quantity> result;
  for (const Quantity& quantity : quantities) {
    const bool fitted = std::isfinite(input.run.summary.parameter(quantity.parameter).value);
    if (known_for_some(input.all, quantity.member) && (!with_parameter || fitted)) result.push_back(quantity);
  }
  return result;
}

/// Panels beside each other: two in two columns' width, one in one.
std::size_t columns_for(double width, std::size_t panels, std::size_t most) {
  const std::size_t fit = width > 400 ? most : 1;
  return std::min(fit, panels);
}

/// Rows that so many panels take up; none without a panel.
std::size_t rows_for(std::size_t panels, std::size_t columns) {
  return panels == 0 ? 0 : (panels + columns - 1) / columns;
}

void draw_residuals(Drawing& drawing, const ChartInput& input) {
  const auto list = present(input, false);
  const std::size_t columns = columns_for(drawing.width(), list.size(), 2), rows = rows_for(list.size(), columns);
  const double key =
      draw_survey_key(drawing, input.all, left_margin, top_margin, drawing.width() - left_margin - right_margin);
  const double cell_w = drawing.width() / static_cast<double>(columns),
               cell_h = (drawing.height() - key - top_margin) / static_cast<double>(rows);
  const auto r = used_values(input.all, &SupernovaRow::residual);
  for (std::size_t k = 0; k < list.size(); ++k) {
    const std::size_t column = k % columns, row = k / columns;
    const double x = cell_w * static_cast<double>(column) + left_margin,
                 y = top_margin + key + cell_h * static_cast<double>(row);
    const PlotArea area(x, y, cell_w - left_margin - right_margin, cell_h - bottom_margin - 4,
                        {list[k].title, range_of(used_values(input.all, list[k].member))},
                        {"residual (mag)", residual_range(input.all), false, true});
    area.frame(drawing, true, column == 0);
    area.level(drawing, 0);
    draw_points(drawing, area, input.all, list[k].member, r, &SupernovaRow::residual_error, 6);
  }
}

void draw_standardisation(Drawing& drawing, const ChartInput& input) {
  const auto list = present(input, true);
  const std::size_t columns = columns_for(drawing.width(), list.size(), 3), rows = rows_for(list.size(), columns);
  const double cell_w = drawing.width() / static_cast<double>(columns),
               cell_h = drawing.height() / static_cast<double>(rows);
  const auto r = used_values(input.all, &SupernovaRow::residual),
             re = used_values(input.all, &SupernovaRow::residual_error);
  for (std::size_t k = 0; k < list.size(); ++k) {
    const double value = input.run.summary.parameter(list[k].parameter).value;
    std::vector<double> before;
    for (const SupernovaRow& row : input.all.rows) {
      if (row.used) before.push_back(residual_without(row, list[k].parameter, value));
    }
    const std::size_t column = k % columns, row = k / columns;
    const double x = cell_w * static_cast<double>(column) + left_margin,
                 y = top_margin + cell_h * static_cast<double>(row);
    const double width = cell_w - left_margin - right_margin, height = cell_h - bottom_margin - top_margin - 4;
    const Direction across{list[k].title, range_of(used_values(input.all, list[k].member))};
    const PlotArea above(x, y, width, 0.55 * height, across,
                         {fmt::format("without {} (mag)", list[k].symbol), range_of(before, re), false, true});
    const PlotArea below(x, y + 0.55 * height + 4, width, 0.45 * height, across,
                         {fmt::format("with {} (mag)", list[k].symbol), residual_range(input.all), false, true});
    above.frame(drawing, false);
    below.frame(drawing);
    below.level(drawing, 0);
    draw_points(drawing, above, input.all, list[k].member, before, &SupernovaRow::residual_error, 0);
    std::vector<double> line_x, line_y;
    const std::string name = list[k].parameter;
    const Range range = across.range;
    const std::vector<double> places = name == "gamma" ? std::vector<double>{range.low, 10, 10, range.high}
                                                       : std::vector<double>{range.low, range.high};
    for (std::size_t i = 0; i < places.size(); ++i) {
      line_x.push_back(above.x(places[i]));
      line_y.push_back(above.y(name == "alpha"  ? -value * (places[i] - 1)
                               : name == "beta" ? value * places[i]
                                                : (i < 2 ? 0.5 : -0.5) * value));
    }
    above.begin_clip(drawing);
    drawing.polyline(line_x, line_y, 1.1, ink);
    drawing.end_clip();
    draw_points(drawing, below, input.all, list[k].member, r, &SupernovaRow::residual_error, 6);
  }
}

}  // namespace

Figure hubble_figure(const ChartInput& input, double width) {
  return {"hubble", has_residuals(input.all), width > 400 ? 300.0 : 270.0, draw_hubble};
}

Figure residual_figure(const ChartInput& input, double width) {
  const std::size_t count = present(input, false).size(), columns = columns_for(width, count, 2),
                    rows = rows_for(count, columns);
  const bool possible = has_residuals(input.all) && count > 0;
  return {"residuals", possible, possible ? 30 + 140 * static_cast<double>(rows) : 0, draw_residuals};
}

Figure standardisation_figure(const ChartInput& input, double width) {
  const std::size_t count = present(input, true).size(), columns = columns_for(width, count, 3),
                    rows = rows_for(count, columns);
  const bool possible = has_residuals(input.all) && count > 0;
  return {"standardisation", possible, possible ? 245 * static_cast<double>(rows) : 0, draw_standardisation};
}

std::size_t survey_number(const SupernovaRows& all, const SupernovaRow& row) {
  return static_cast<std::size_t>(std::find(all.surveys.begin(), all.surveys.end(), row.survey) - all.surveys.begin());
}

double draw_survey_key(Drawing& drawing, const SupernovaRows& all, double x, double y, double width) {
  if (all.surveys.size() < 2) return 0;
  double at = x, line = y + 2;
  for (std::size_t k = 0; k < all.surveys.size(); ++k) {
    const double needed = 16 + drawing.text_width(all.surveys[k], 7.5);
    if (at > x && at + needed > x + width) at = x, line += 11;
    drawing.symbol(k, at + 3, line - 2.6, 2.3, series_colour(k));
    drawing.text(at + 8, line, all.surveys[k], 7.5);
    at += needed;
  }
  return line - y + 6;
}

}  // namespace thirdrung
