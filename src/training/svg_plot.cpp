#include "training/svg_plot.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "base/atomic_file.h"

namespace thirdrung {

namespace {

std::string escaped(const std::string& words) {
  std::string out;
  for (const char c : words) {
    if (c == '&') {
      out += "&amp;";
    } else if (c == '<') {
      out += "&lt;";
    } else if (c == '>') {
      out += "&gt;";
    } else {
      out += c;
    }
  }
  return out;
}

struct Rgb {
  double r, g, b;
};

std::string mixed(Rgb a, Rgb b, double part) {
  const auto channel = [&](double from, double to) { return static_cast<int>(std::lround(from + part * (to - from))); };
  return fmt::format("#{:02x}{:02x}{:02x}", channel(a.r, b.r), channel(a.g, b.g), channel(a.b, b.b));
}

/// Round values between two limits, about `wanted` of them, with the digits that they need.
std::vector<std::pair<double, std::string>> round_ticks(double from, double to, double wanted) {
  const double span = std::abs(to - from);
  const double power = std::pow(10.0, std::floor(std::log10(span / wanted)));
  double step = power;
  for (const double factor : {1.0, 2.0, 5.0, 10.0}) {
    step = factor * power;
    if (span / step <= wanted) break;
  }
  const int digits = std::max(0, static_cast<int>(-std::floor(std::log10(step) + 1e-9)));
  std::vector<std::pair<double, std::string>> out;
  const auto first = static_cast<long>(std::ceil(std::min(from, to) / step - 1e-6));
  const auto last = static_cast<long>(std::floor(std::max(from, to) / step + 1e-6));
  for (long k = first; k <= last; ++k) {
    const double value = static_cast<double>(k) * step;
    std::string words = fmt::format("{:.{}f}", k == 0 ? 0.0 : value, digits);
    if (words.front() == '-') words.replace(0, 1, "−");
    out.emplace_back(value, words);
  }
  return out;
}

constexpr Rgb pale{242, 240, 234}, deep_blue{17, 48, 96}, strong_blue{52, 82, 185}, strong_orange{199, 109, 28};

}  // namespace

const std::string SvgPlot::ink = "#1c1f24", SvgPlot::muted = "#5a5f68", SvgPlot::rule = "#d8d5cc",
                  SvgPlot::blue = "#3452b9", SvgPlot::orange = "#c76d1c", SvgPlot::teal = "#399b8c",
                  SvgPlot::plum = "#55013d";

SvgPlot::SvgPlot(double width, double height) : width_(width), height_(height) {}

std::string SvgPlot::shade(double fraction) {
  return mixed(pale, deep_blue, std::clamp(fraction, 0.0, 1.0));
}

std::string SvgPlot::two_sided(double fraction) {
  return fraction < 0 ? mixed(pale, strong_blue, std::min(1.0, -fraction))
                      : mixed(pale, strong_orange, std::min(1.0, fraction));
}

double SvgPlot::across(double x) const {
  return place_.left + place_.width * (x - x_.from) / (x_.to - x_.from);
}

double SvgPlot::up(double y) const {
  return place_.top + place_.height * (1 - (y - y_.from) / (y_.to - y_.from));
}

void SvgPlot::raw_text(double x, double y, const std::string& words, const std::string& colour, const char* anchor,
                       double size, bool turned) {
  const std::string turn = turned ? fmt::format(" transform=\"rotate(-90 {:.1f} {:.1f})\"", x, y) : "";
  body_ += fmt::format("<text x=\"{:.1f}\" y=\"{:.1f}\" fill=\"{}\" text-anchor=\"{}\" font-size=\"{}\"{}>{}</text>\n",
                       x, y, colour, anchor, size, turn, escaped(words));
}

void SvgPlot::ticks(bool horizontal) {
  Axis& axis = horizontal ? x_ : y_;
  const double length = horizontal ? place_.width : place_.height;
  if (axis.ticks.empty()) axis.ticks = round_ticks(axis.from, axis.to, std::max(3.0, length / (horizontal ? 42 : 32)));
  const double bottom = place_.top + place_.height;
  for (const auto& [value, words] : axis.ticks) {
    if (horizontal) {
      const double at = across(value);
      body_ += fmt::format("<path d=\"M{:.1f} {:.1f}v4\" stroke=\"{}\"/>\n", at, bottom, muted);
      raw_text(at, bottom + 16, words, muted, "middle", 10.5);
    } else {
      const double at = up(value);
      body_ += fmt::format("<path d=\"M{:.1f} {:.1f}h-4\" stroke=\"{}\"/>\n", place_.left, at, muted);
      raw_text(place_.left - 7, at + 3.6, words, muted, "end", 10.5);
    }
  }
}

void SvgPlot::panel(const Rectangle& place, Axis x, Axis y, const std::string& title) {
  place_ = place;
  x_ = std::move(x);
  y_ = std::move(y);
  ++panels_;
  body_ += fmt::format(
      "<clipPath id=\"frame{}\"><rect x=\"{:.1f}\" y=\"{:.1f}\" width=\"{:.1f}\" height=\"{:.1f}\"/></clipPath>\n"
      "<path d=\"M{:.1f} {:.1f}v{:.1f}h{:.1f}\" fill=\"none\" stroke=\"{}\"/>\n",
      panels_, place.left, place.top, place.width, place.height, place.left, place.top, place.height, place.width,
      muted);
  ticks(true);
  ticks(false);
  const double bottom = place.top + place.height;
  if (!x_.label.empty()) raw_text(place.left + place.width / 2, bottom + 33, x_.label, ink, "middle", 11.5);
  if (!y_.label.empty()) raw_text(place.left - 42, place.top + place.height / 2, y_.label, ink, "middle", 11.5, true);
  if (!title.empty()) raw_text(place.left, place.top - 7, title, ink, "start", 12);
}

std::string SvgPlot::path_of(const Values& x, const Values& y) const {
  std::string out;
  bool drawing = false;
  for (std::size_t i = 0; i < x.size(); ++i) {
    if (!std::isfinite(x[i]) || !std::isfinite(y[i])) {
      drawing = false;
      continue;
    }
    out += fmt::format("{}{:.1f} {:.1f}", drawing ? 'L' : 'M', across(x[i]), up(y[i]));
    drawing = true;
  }
  return out;
}

void SvgPlot::clipped(const std::string& element) {
  body_ += fmt::format("<g clip-path=\"url(#frame{})\">{}</g>\n", panels_, element);
}

void SvgPlot::line(const Values& x, const Values& y, const std::string& colour, double thickness, bool dashed) {
  clipped(fmt::format("<path d=\"{}\" fill=\"none\" stroke=\"{}\" stroke-width=\"{}\"{}/>", path_of(x, y), colour,
                      thickness, dashed ? " stroke-dasharray=\"5 3\"" : ""));
}

void SvgPlot::band(const Values& x, const Values& low, const Values& high, const std::string& colour) {
  Values around_x = x;
  Values around_y = low;
  around_x.insert(around_x.end(), x.rbegin(), x.rend());
  around_y.insert(around_y.end(), high.rbegin(), high.rend());
  clipped(fmt::format("<path d=\"{}Z\" fill=\"{}\" fill-opacity=\"0.22\"/>", path_of(around_x, around_y), colour));
}

void SvgPlot::points(const Values& x, const Values& y, const Values& error, const std::string& colour) {
  std::string out;
  for (std::size_t i = 0; i < x.size(); ++i) {
    if (!std::isfinite(y[i])) continue;
    if (!error.empty()) {
      out += fmt::format("<path d=\"M{:.1f} {:.1f}V{:.1f}\" stroke=\"{}\"/>", across(x[i]), up(y[i] - error[i]),
                         up(y[i] + error[i]), colour);
    }
    out += fmt::format("<circle cx=\"{:.1f}\" cy=\"{:.1f}\" r=\"2.6\" fill=\"{}\"/>", across(x[i]), up(y[i]), colour);
  }
  clipped(out);
}

void SvgPlot::points_across(const Values& x, const Values& y, const Values& error, const std::string& colour) {
  std::string out;
  for (std::size_t i = 0; i < x.size(); ++i) {
    if (!std::isfinite(x[i])) continue;
    out += fmt::format("<path d=\"M{:.1f} {:.1f}H{:.1f}\" stroke=\"{}\"/>", across(x[i] - error[i]), up(y[i]),
                       across(x[i] + error[i]), colour);
    out += fmt::format("<circle cx=\"{:.1f}\" cy=\"{:.1f}\" r=\"2.6\" fill=\"{}\"/>", across(x[i]), up(y[i]), colour);
  }
  clipped(out);
}

void SvgPlot::cell(double x1, double y1, double x2, double y2, const std::string& colour) {
  const double left = std::min(across(x1), across(x2));
  const double top = std::min(up(y1), up(y2));
  // A hair wider than it is, so that no seam shows between neighbours.
  clipped(fmt::format("<rect x=\"{:.1f}\" y=\"{:.1f}\" width=\"{:.1f}\" height=\"{:.1f}\" fill=\"{}\"/>", left, top,
                      std::abs(across(x2) - across(x1)) + 0.4, std::abs(up(y2) - up(y1)) + 0.4, colour));
}

void SvgPlot::text(double x, double y, const std::string& words, const std::string& colour, const char* anchor,
                   double size) {
  raw_text(across(x), up(y), words, colour, anchor, size);
}

std::string SvgPlot::svg() const {
  return fmt::format(
      "<svg xmlns=\"http://www.w3.org/2000/svg\" width=\"{0}\" height=\"{1}\" viewBox=\"0 0 {0} {1}\" "
      "font-family=\"Helvetica, Arial, 'Liberation Sans', sans-serif\">\n"
      "<rect width=\"{0}\" height=\"{1}\" fill=\"#ffffff\"/>\n{2}</svg>\n",
      width_, height_, body_);
}

void SvgPlot::write(const std::filesystem::path& path) const {
  write_file_atomically(path, svg());
}

}  // namespace thirdrung
