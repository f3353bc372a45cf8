// Static figure of the calibrators: the absolute magnitude that each alone gives, about M_B of the ladder.
#include <cmath>

#include "report/digits.h"
#include "report/figure_parts.h"
#include "report/ladder_rows.h"

namespace thirdrung {
namespace {

constexpr double row_height = 11, top = 8, below = 30;  // [points]

void draw_calibrators(Drawing& drawing, const ChartInput& input) {
  const LadderRows ladder = ladder_rows(input.run);
  std::vector<double> values{ladder.m_b.value}, errors{ladder.m_b.error};
  for (const CalibratorRow& one : ladder.calibrators) {
    if (!one.used) continue;
    values.push_back(one.absolute);
    errors.push_back(one.absolute_error);
  }
  const double label_room = std::min(120.0, 0.36 * drawing.width()), number_room = drawing.width() > 400 ? 88 : 0;
  const double height = drawing.height() - top - below;
  const PlotArea area(label_room, top, drawing.width() - label_room - number_room - 8, height,
                      {"M_{B} (mag)", range_of(values, errors)}, {"", {0, 1}, false, false, nlohmann::json::array()});
  const double low = area.x(ladder.m_b.value - ladder.m_b.error), high = area.x(ladder.m_b.value + ladder.m_b.error);
  area.begin_clip(drawing);
  drawing.rectangle(low, top, high - low, height, pale);
  drawing.line(area.x(ladder.m_b.value), top, area.x(ladder.m_b.value), top + height, 0.8, ink);
  drawing.end_clip();
  double y = top + 4;
  for (const CalibratorRow& one : ladder.calibrators) {
    if (!one.used) continue;
    y += row_height;
    drawing.text(label_room - 5, y + 2.5, one.supernova, 6.5, Align::right);
    const double error = one.absolute_error;
    drawing.line(area.x(one.absolute - error), y, area.x(one.absolute + error), y, 1, ink);
    drawing.symbol(0, area.x(one.absolute), y, 2.3, ink);
    if (number_room > 0)
      drawing.text(drawing.width() - 4, y + 2.5, signed_with_error(one.residual, error), 6.5, Align::right);
  }
  area.frame(drawing, true, false);
}

}  // namespace

Figure calibrator_figure(const ChartInput& input, double) {
  if (!has_ladder(input.run)) return {"calibrators", false, 0, draw_calibrators};
  double rows = 1;
  for (const CalibratorRow& one : ladder_rows(input.run).calibrators) rows += one.used ? 1 : 0;
  return {"calibrators", true, top + below + row_height * rows, draw_calibrators};
}

}  // namespace thirdrung
