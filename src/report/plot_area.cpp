#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "report/digits.h"
#include "report/drawing.h"

namespace thirdrung {
namespace {

double fraction(const Direction& direction, double value) {
  if (direction.logarithmic)
    return std::log(value / direction.range.low) / std::log(direction.range.high / direction.range.low);
  return (value - direction.range.low) / (direction.range.high - direction.range.low);
}

std::vector<double> ticks_of(const Direction& direction, int count) {
  if (direction.values.is_array()) return direction.values.get<std::vector<double>>();
  return round_ticks(direction.range, count);
}

/// Labels with the decimals that their step needs.
std::string label_of(double value, const std::vector<double>& ticks, bool logarithmic) {
  if (logarithmic) return fmt::format("{:.3g}", value);
  const double step = ticks.size() > 1 ? ticks[1] - ticks[0] : std::abs(value);
  const int decimals = step > 0 ? std::max(0, static_cast<int>(-std::floor(std::log10(step) + 1e-9))) : 0;
  return fixed(value, decimals);
}

}  // namespace

std::vector<double> round_ticks(Range range, int count) {
  const double span = range.high - range.low;
  if (!(span > 0)) return {range.low};
  const double decade = std::pow(10.0, std::floor(std::log10(span / count)));
  double step = 10 * decade;
  for (const double lead : {5.0, 2.0, 1.0}) {
    if (span / (lead * decade) <= count * 1.2) step = lead * decade;
  }
  std::vector<double> ticks;
  for (double k = std::ceil(range.low / step - 1e-9); k * step <= range.high + 1e-9 * span; ++k)
    ticks.push_back(k * step);
  return ticks;
}

double PlotArea::x(double value) const {
  return x_ + width_ * fraction(across_, value);
}

double PlotArea::y(double value) const {
  const double part = fraction(up_, value);
  return up_.brighter_up ? y_ + height_ * part : y_ + height_ * (1 - part);
}

void PlotArea::frame(Drawing& drawing, bool with_x, bool with_y) const {
  const double small = 7, title = 8, tick = 3;
  drawing.rectangle(x_, y_, width_, height_, ink, false);
  const auto across = ticks_of(across_, std::max(2, static_cast<int>(width_ / 34)));
  double last_label = -1e9;
  for (const double value : across) {
    const double place = x(value);
    drawing.line(place, y_ + height_, place, y_ + height_ - tick, 0.6, ink);
    drawing.line(place, y_, place, y_ + tick, 0.6, ink);
    if (!with_x || place - last_label < 22) continue;
    last_label = place;
    drawing.text(place, y_ + height_ + 9, label_of(value, across, across_.logarithmic), small, Align::centre);
  }
  const auto up = ticks_of(up_, std::max(2, static_cast<int>(height_ / 19)));
  double widest = 0;
  for (const double value : up) {
    const double place = y(value);
    drawing.line(x_, place, x_ + tick, place, 0.6, ink);
    drawing.line(x_ + width_, place, x_ + width_ - tick, place, 0.6, ink);
    widest = std::max(widest, drawing.text(x_ - 3, place + 2.5, label_of(value, up, false), small, Align::right));
  }
  if (with_x) drawing.text(x_ + width_ / 2, y_ + height_ + 20, across_.title, title, Align::centre);
  if (with_y) drawing.text(x_ - widest - 8, y_ + height_ / 2, up_.title, title, Align::centre, ink, 90);
}

void PlotArea::vertical_error(Drawing& drawing, double x_value, double y_value, double error, double thickness,
                              Colour colour) const {
  if (std::isfinite(error))
    drawing.line(x(x_value), y(y_value - error), x(x_value), y(y_value + error), thickness, colour);
}

void PlotArea::level(Drawing& drawing, double value) const {
  drawing.line(x_, y(value), x_ + width_, y(value), 0.6, ink);
}

}  // namespace thirdrung
