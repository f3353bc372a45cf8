// Static figures of bars: populations, the scan of choices, the error budget.
#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "report/digits.h"
#include "report/figure_parts.h"
#include "report/histogram.h"

namespace thirdrung {
namespace {

struct Population {
  double SupernovaRow::*member;
  double SupernovaRow::*error_member;
  const char* title;
  const char* mean;
  const char* width;
};
const Population populations[] = {{&SupernovaRow::s, &SupernovaRow::s_error, "stretch s", "s_mean", "s_width"},
                                  {&SupernovaRow::c, &SupernovaRow::c_error, "colour c (mag)", "c_mean", "c_width"}};

bool enough(const SupernovaRows& all, double SupernovaRow::*member) {
  const auto values = used_values(all, member);
  return std::count_if(values.begin(), values.end(), [](double v) { return std::isfinite(v); }) >= 3;
}

void draw_populations(Drawing& drawing, const ChartInput& input) {
  const bool wide = drawing.width() > 400;
  const double cell_w = wide ? drawing.width() / 2 : drawing.width(),
               cell_h = wide ? drawing.height() : drawing.height() / 2;
  int k = 0;
  for (const Population& population : populations) {
    if (!enough(input.all, population.member)) continue;
    const double x = (wide ? cell_w * k : 0) + 40, y = (wide ? 0 : cell_h * k) + 8;
    const Histogram histogram = make_histogram(input.all, population.member, population.error_member,
                                               input.run.summary.parameter(population.mean).value,
                                               input.run.summary.parameter(population.width).value);
    const PlotArea area(x, y, cell_w - 46, cell_h - 36, {population.title, {histogram.low, histogram.high()}},
                        {fmt::format("supernovae per {:.3g}", histogram.step), {0, 1.08 * histogram.top()}});
    for (std::size_t b = 0; b < histogram.counts.size(); ++b) {
      const double from = area.x(histogram.low + histogram.step * static_cast<double>(b)),
                   to = area.x(histogram.low + histogram.step * static_cast<double>(b + 1));
      drawing.rectangle(from + 0.3, area.y(histogram.counts[b]), to - from - 0.6,
                        area.y(0) - area.y(histogram.counts[b]), pale);
    }
    std::vector<double> at, seen, intrinsic;
    for (std::size_t i = 0; i < histogram.x.size(); ++i) {
      at.push_back(area.x(histogram.x[i]));
      seen.push_back(area.y(histogram.seen[i]));
      intrinsic.push_back(area.y(histogram.intrinsic[i]));
    }
    drawing.polyline(at, seen, 1.2, ink);
    drawing.polyline(at, intrinsic, 0.8, ink, true);
    area.frame(drawing);
    ++k;
  }
}

/// Text cut to a width, with an ellipsis.
std::string shortened(Drawing& drawing, std::string text, double size, double width) {
  if (drawing.text_width(text, size) <= width) return text;
  while (!text.empty() && drawing.text_width(text + "…", size) > width) {
    do {
      text.pop_back();
    } while (!text.empty() && (static_cast<unsigned char>(text.back()) & 0xC0U) == 0x80U);
    // A lead byte left alone at the end belongs to the character that was cut.
    if (!text.empty() && static_cast<unsigned char>(text.back()) >= 0xC0U) text.pop_back();
  }
  return text + "…";
}

void draw_scans(Drawing& drawing, const ChartInput& input) {
  const Table& table = *input.run.scans;
  const auto axes = table.strings("scan"), settings = table.strings("setting");
  const auto shift = table.reals("delta_ab"), error = reals_or_missing(table, "delta_ab_error");
  const double label_room = std::min(150.0, 0.36 * drawing.width()), number_room = drawing.width() > 400 ? 88 : 0;
  const Range range = range_of(shift, error);
  const double largest = 1000 * std::max(std::abs(range.low), std::abs(range.high));
  const double width = drawing.width() - label_room - number_room - 8, height = drawing.height() - 34;
  const PlotArea area(label_room, 6, width, height,
                      {"10^3 Δa_{B}, with the error of the difference", {-largest, largest}},
                      {"", {0, 1}, false, false, nlohmann::json::array()});
  area.frame(drawing, true, false);
  drawing.line(area.x(0), 6, area.x(0), 6 + height, 0.6, ink);
  double y = 6;
  std::string last;
  for (std::size_t i = 0; i < shift.size(); ++i) {
    if (i == 0 || axes[i] != last) {
      y += 11;
      drawing.text(label_room - 5, y + 2.5, shortened(drawing, axes[i], 7, label_room - 8), 7, Align::right);
      last = axes[i];
    }
    y += 10;
    drawing.text(label_room - 5, y + 2.5, shortened(drawing, settings[i], 6.5, label_room - 18), 6.5, Align::right,
                 grey);
    if (!std::isfinite(shift[i])) continue;
    const double low = area.x(1000 * (shift[i] - error[i])), high = area.x(1000 * (shift[i] + error[i]));
    if (std::isfinite(error[i])) drawing.line(low, y, high, y, 1, ink);
    const bool far = std::abs(shift[i]) > 2 * error[i];
    drawing.symbol(far ? 3 : 0, area.x(1000 * shift[i]), y, 2.3, ink);
    if (number_room > 0)
      drawing.text(drawing.width() - 4, y + 2.5, signed_with_error(1000 * shift[i], 1000 * error[i]), 6.5,
                   Align::right);
  }
}

void draw_budget(Drawing& drawing, const ChartInput& input) {
  const Table& table = *input.run.budget;
  const auto sources = table.strings("source"), kinds = strings_or_empty(table, "kind");
  const auto values = table.reals("ab_contribution");
  std::vector<std::size_t> order;
  for (std::size_t i = 0; i < values.size(); ++i) {
    if (std::isfinite(values[i])) order.push_back(i);
  }
  std::stable_sort(order.begin(), order.end(),
                   [&](std::size_t a, std::size_t b) { return std::abs(values[a]) > std::abs(values[b]); });
  const double label_room = std::min(165.0, 0.42 * drawing.width());
  const double top = order.empty() ? 1 : 1000 * std::abs(values[order.front()]);
  const PlotArea area(label_room, 6, drawing.width() - label_room - 10, drawing.height() - 34,
                      {"10^3 × error of a_{B}", {0, 1.06 * top}}, {"", {0, 1}, false, false, nlohmann::json::array()});
  double y = 16;
  for (const std::size_t i : order) {
    drawing.text(label_room - 5, y + 2.5, shortened(drawing, sources[i], 7, label_room - 8), 7, Align::right);
    const bool statistical = kinds[i].rfind("stat", 0) == 0;
    drawing.rectangle(area.x(0), y - 4, area.x(1000 * std::abs(values[i])) - area.x(0), 8,
                      statistical ? grey : series_colour(0));
    y += 13;
  }
  const double key = 6 + drawing.height() - 34 - 8;
  drawing.rectangle(drawing.width() - 130, key - 6, 8, 6, grey);
  drawing.text(drawing.width() - 119, key, "statistical", 6.5);
  drawing.rectangle(drawing.width() - 72, key - 6, 8, 6, series_colour(0));
  drawing.text(drawing.width() - 61, key, "systematic", 6.5);
  area.frame(drawing, true, false);
}

}  // namespace

Figure population_figure(const ChartInput& input, double width) {
  const bool possible = enough(input.all, &SupernovaRow::s) || enough(input.all, &SupernovaRow::c);
  return {"populations", possible, width > 400 ? 160.0 : 290.0, draw_populations};
}

Figure scan_figure(const ChartInput& input, double) {
  if (!input.run.scans) return {"scans", false, 0, draw_scans};
  const auto axes = input.run.scans->strings("scan");
  std::size_t headings = 0;
  for (std::size_t i = 0; i < axes.size(); ++i) headings += i == 0 || axes[i] != axes[i - 1] ? 1 : 0;
  return {"scans", true, 46 + 10 * static_cast<double>(axes.size()) + 11 * static_cast<double>(headings), draw_scans};
}

Figure budget_figure(const ChartInput& input, double) {
  if (!input.run.budget) return {"budget", false, 0, draw_budget};
  return {"budget", true, 60 + 13 * static_cast<double>(input.run.budget->rows()), draw_budget};
}

}  // namespace thirdrung
