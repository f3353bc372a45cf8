#pragma once

#include <filesystem>
#include <string>
#include <vector>

namespace thirdrung {

/// A figure as SVG text, built panel by panel; lengths in pixels.
///
/// Colours are those of the report's page: blue, orange, teal and plum can be told apart by colour-blind readers, and
/// every series has a label of its own besides.
class SvgPlot {
 public:
  SvgPlot(double width, double height);

  /// One axis. `from` stands at the left or bottom, so a magnitude axis has the larger value first.
  struct Axis {
    double from = 0, to = 1;
    std::string label;
    /// Values and texts of ticks; round values are chosen if there are none.
    std::vector<std::pair<double, std::string>> ticks = {};
  };
  struct Rectangle {
    double left = 0, top = 0, width = 0, height = 0;
  };
  using Values = std::vector<double>;

  /// Opens a panel; everything drawn afterwards is in its coordinates and cut at its frame.
  void panel(const Rectangle& place, Axis x, Axis y, const std::string& title = "");

  void line(const Values& x, const Values& y, const std::string& colour, double thickness = 1.4, bool dashed = false);
  /// Shading between two curves.
  void band(const Values& x, const Values& low, const Values& high, const std::string& colour);
  /// Dots with vertical error bars (none if `error` is empty).
  void points(const Values& x, const Values& y, const Values& error, const std::string& colour);
  /// Dots with horizontal error bars.
  void points_across(const Values& x, const Values& y, const Values& error, const std::string& colour);
  /// A filled rectangle with corners at (x1, y1) and (x2, y2).
  void cell(double x1, double y1, double x2, double y2, const std::string& colour);
  /// Text at a place in the panel's coordinates; `anchor` start, middle or end.
  void text(double x, double y, const std::string& words, const std::string& colour, const char* anchor = "start",
            double size = 11);

  /// The figure so far as a complete SVG document.
  std::string svg() const;
  void write(const std::filesystem::path& path) const;

  static const std::string ink, muted, rule, blue, orange, teal, plum;
  /// From pale (0) to dark blue (1).
  static std::string shade(double fraction);
  /// From blue (−1) over pale (0) to orange (+1).
  static std::string two_sided(double fraction);

 private:
  double across(double x) const;
  double up(double y) const;
  void ticks(bool horizontal);
  void raw_text(double x, double y, const std::string& words, const std::string& colour, const char* anchor,
                double size, bool turned = false);
  std::string path_of(const Values& x, const Values& y) const;
  void clipped(const std::string& element);

  double width_, height_;
  std::string body_;
  int panels_ = 0;
  Rectangle place_;
  Axis x_, y_;
};

}  // namespace thirdrung
